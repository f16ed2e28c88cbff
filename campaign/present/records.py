"""One record in full, and the cautions that go with what it names."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from campaign.present.listing import show_record as show_fields
from campaign.present.tables import show_json


def show_record(kind: str, record: Mapping[str, Any], *, as_json: bool) -> None:
    """Print a record as fields, with cautions where it names an electrolyte."""
    recipe = record.get("recipe") or record.get("electrolyte")
    if as_json:
        show_json({"kind": kind, "record": record})
        return
    show_fields(kind, record)
    if recipe:
        show_cautions([str(recipe)])


def show_cautions(recipes: Iterable[str]) -> None:
    """Print the usual cautions for what recipes hold."""
    from campaign.chemistry.recipes import parse_recipe
    from campaign.chemistry.species import cautions

    names = [part.species for recipe in recipes for part in parse_recipe(recipe).components]
    print("Caution")
    for line in cautions(dict.fromkeys(names)):
        print(f"  {line}")
