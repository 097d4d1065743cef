"""Weather for a collector: real years, the sun, the sky and the tilted plane. Knows nothing of collectors."""
