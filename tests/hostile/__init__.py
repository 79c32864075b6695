"""What somebody may have put into a file."""
