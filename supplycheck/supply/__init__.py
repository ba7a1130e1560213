"""Supply curves, flow-test reduction, comparison of demand with supply, and the margin.

Flow tests and tanks become one :class:`NodeSupply` a source node (:func:`supply_curves`), which the network
takes through :func:`source_curves`; :func:`compare` sets the demand solution beside them.
"""

from supplycheck.supply.comparison import Comparison, compare, reference_date
from supplycheck.supply.curve import SupplyCurve, constant_curve, curve_through, lower_envelope
from supplycheck.supply.graph import CurveLine, GraphData, MarkedPoint, curve_points
from supplycheck.supply.hose import HoseLoad, hose_loads, hose_parts
from supplycheck.supply.margin import (
    MarginCase,
    RequiredMargin,
    age_in_years,
    required_margin,
    rule_words,
)
from supplycheck.supply.outlets import OutletFlow, outlet_flow, reduce_outlets
from supplycheck.supply.quality import FlowTestFacts, PitotFact, flow_test_facts
from supplycheck.supply.route import CarriedCurve, Route
from supplycheck.supply.shares import SourceShare
from supplycheck.supply.sources import NodeSupply, Stage, gauge_curve, source_curves, supply_curves

__all__ = [
    "CarriedCurve",
    "Comparison",
    "CurveLine",
    "FlowTestFacts",
    "GraphData",
    "HoseLoad",
    "MarginCase",
    "MarkedPoint",
    "NodeSupply",
    "OutletFlow",
    "PitotFact",
    "RequiredMargin",
    "Route",
    "SourceShare",
    "Stage",
    "SupplyCurve",
    "age_in_years",
    "compare",
    "constant_curve",
    "curve_points",
    "curve_through",
    "flow_test_facts",
    "gauge_curve",
    "hose_loads",
    "hose_parts",
    "lower_envelope",
    "outlet_flow",
    "reduce_outlets",
    "reference_date",
    "required_margin",
    "rule_words",
    "source_curves",
    "supply_curves",
]
