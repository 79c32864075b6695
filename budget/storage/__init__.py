"""Files: reading within limits, and saving so that the file on disk is always whole."""

from budget.storage.files import ChangedOnDisk, Stamp, StorageError, load, load_text, save
from budget.storage.libraries import read_libraries, renew

__all__ = ["ChangedOnDisk", "Stamp", "StorageError", "load", "load_text", "read_libraries", "renew", "save"]
