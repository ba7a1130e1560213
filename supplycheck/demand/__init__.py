"""From the design criteria to the demand cases: which heads flow together, and what each needs."""

from supplycheck.demand.area import demand_cases
from supplycheck.demand.heads import required_at_head
from supplycheck.demand.records import Candidates

__all__ = ["Candidates", "Step", "demand_cases", "required_at_head"]
