"""Exposure limits: which hazards are due, and the comparison that gives ratios and verdicts."""
