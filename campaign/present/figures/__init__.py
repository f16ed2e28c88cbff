"""Figures: one module a kind. Only these modules import Matplotlib, and only when asked for."""
