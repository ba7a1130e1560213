"""Screening of many hydrant tests: streamed rows in, results, rejects, map and report out."""
