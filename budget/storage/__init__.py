"""Files: reading within limits, saving so that the file on disk is always whole, and what is kept of unsaved work."""

from budget.storage.files import ChangedOnDisk, Look, Stamp, StorageError, load, load_text, look, save
from budget.storage.libraries import read_again, read_libraries, renew

__all__ = [
    "ChangedOnDisk",
    "Look",
    "Stamp",
    "StorageError",
    "load",
    "load_text",
    "look",
    "read_again",
    "read_libraries",
    "renew",
    "save",
]
