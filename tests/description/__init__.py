"""Description."""
