"""Files: reading within limits, and saving so that the file on disk is always whole."""

from budget.storage.files import ChangedOnDisk, Stamp, StorageError, load, load_text, save

__all__ = ["ChangedOnDisk", "Stamp", "StorageError", "load", "load_text", "save"]
