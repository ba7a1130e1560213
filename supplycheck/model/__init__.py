"""Frozen records in the trade's nouns: what a project holds once it has been read. All SI."""

from supplycheck.model.criteria import (
    AreaModifier,
    Criteria,
    DemandCase,
    FixedOutlet,
    HoseAllowance,
    VelocityPolicy,
)
from supplycheck.model.fluid import DARCY, HEAD_FORM, HW_METRIC, HW_US, Fluid, FrictionLaw
from supplycheck.model.project import Assumption, InputFile, Project, ProjectFacts, Scenario, Unedited
from supplycheck.model.supply import (
    Adjustment,
    FlowTest,
    MarginRule,
    Outlet,
    Supply,
    Tank,
    TestPoint,
)
from supplycheck.model.system import Device, Fitting, Node, Pipe, PipeKind, PumpData, Sprinkler, System

__all__ = [
    "DARCY",
    "HEAD_FORM",
    "HW_METRIC",
    "HW_US",
    "Adjustment",
    "AreaModifier",
    "Assumption",
    "Criteria",
    "DemandCase",
    "Device",
    "Fitting",
    "FixedOutlet",
    "FlowTest",
    "Fluid",
    "FrictionLaw",
    "HoseAllowance",
    "InputFile",
    "MarginRule",
    "Node",
    "Outlet",
    "Pipe",
    "PipeKind",
    "Project",
    "ProjectFacts",
    "PumpData",
    "Scenario",
    "Sprinkler",
    "Supply",
    "System",
    "Tank",
    "TestPoint",
    "Unedited",
    "VelocityPolicy",
]
