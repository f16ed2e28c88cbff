"""Makes the demo campaign: truth, plan, readings, mishaps, tables."""
