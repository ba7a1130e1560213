"""Demand cases solved on the network: placements, duties, scenarios, and what each asks of it."""
