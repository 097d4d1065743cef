"""Published relations: numbers in, numbers out. Nothing here has seen a scenario or a file."""
