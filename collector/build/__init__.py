"""What the user describes: scenario, catalogue, and the collector in SI units that comes of them."""
