"""Absorbed sunlight, losses and the steady heat balance: all hours at once."""
