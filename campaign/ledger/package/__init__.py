"""Handing a campaign over: a Frictionless Data Package of CSV tables, and back again.

Format: Frictionless Data, Data Package and Table Schema, version 1 (specs.frictionlessdata.io).
"""
