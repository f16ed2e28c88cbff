"""From trends to a verdict: which term dominates, which step stands, how firmly."""
