"""The result of a check: one frozen record, its tables, and ``result.json``."""
