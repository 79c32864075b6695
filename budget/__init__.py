"""The pressure budget of a pipe or duct run."""

__version__ = "0.1.0"
