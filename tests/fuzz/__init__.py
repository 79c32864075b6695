"""Random input to whatever reads what a user or a file says: no fault, no finding without a place, no long wait.

Each target takes bytes and raises where something is wrong. The quick tests run them on generated input and on every
file of the corpus; `python -m tests.fuzz TARGET --seconds N` searches on, led by the branches that an input reaches.
"""

TARGETS = ("reading", "telling", "spans", "edits", "units")
