"""Reading a recipe needs the standard library and campaign.errors, nothing else."""

import subprocess
import sys

PROGRAM = """
import sys
from campaign.chemistry import ions, recipes, references, species
recipes.parse_recipe("1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% Zorblax")
heavy = {"numpy", "scipy", "pandas", "matplotlib", "sqlalchemy", "alembic", "typer", "rich"}
rooms = {"statistics", "kinetics", "ledger", "trends", "diagnosis", "present", "cli"}
print(sorted(heavy & set(sys.modules)), sorted(r for r in rooms if f"campaign.{r}" in sys.modules))
"""


def test_nothing_heavy_and_no_other_room_is_imported() -> None:
    done = subprocess.run(
        [sys.executable, "-c", PROGRAM], capture_output=True, text=True, check=False
    )
    assert done.stdout.strip() == "[] []", done.stderr
