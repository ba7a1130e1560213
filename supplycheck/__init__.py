"""Check a fire sprinkler, standpipe or hydrant system against its water supply."""

__version__ = "0.1.0"
