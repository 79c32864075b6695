"""Published."""
