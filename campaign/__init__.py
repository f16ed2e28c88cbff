"""A ledger of an electrode test campaign that names the rate-limiting step."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from campaign.notebook import Campaign, open_campaign

__version__ = "0.1.0"
__all__ = ["Campaign", "__version__", "open_campaign"]


def __getattr__(name: str) -> Any:
    # Looked up when first used: the commands that log and list never wait for it.
    if name in ("open_campaign", "Campaign"):
        from campaign import notebook

        return getattr(notebook, name)
    raise AttributeError(f"module 'campaign' has no attribute '{name}'")
