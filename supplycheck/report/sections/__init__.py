"""The sections of the report, one module for each group of pages."""
