"""Figures made of neutral drawing primitives; none of them knows a writer."""
