"""The flows as installed."""
