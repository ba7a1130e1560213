"""The project file: schema, reader, tables, layout generator, fittings from geometry."""

from supplycheck.project.faults import ProjectFaultsError
from supplycheck.project.reader import read_project

__all__ = ["ProjectFaultsError", "read_project"]
