"""The figures of a run as calculations: what stands on a leg, on a section, on a terminal, on a source."""
