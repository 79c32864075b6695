"""Independent."""
