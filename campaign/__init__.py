"""A ledger of an electrode test campaign that names the rate-limiting step."""

__version__ = "0.1.0"
