"""What the README says of the flat table and of the program is so."""

import json
import re
from pathlib import Path

import pytest

from campaign.ledger.flat.headers import CANONICAL

README = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")


def blocks():
    """The indented blocks of the README, each as one text; code between fences is none."""
    unfenced = re.sub(r"^```.*?^```$", "", README, flags=re.MULTILINE | re.DOTALL)
    return re.findall(r"(?:^    .*\n)+", unfenced, re.MULTILINE)


def test_the_flat_table_of_the_readme_is_the_one_that_is_read():
    (block,) = [b for b in blocks() if b.lstrip().startswith("electrode, material")]
    assert tuple(name.strip() for name in block.replace("\n", " ").split(",")) == CANONICAL


@pytest.mark.parametrize(
    "recipe", [line.strip() for b in blocks() if " M Na" in b for line in b.splitlines()]
)
def test_every_recipe_of_the_readme_is_read(recipe):
    from campaign.chemistry.recipes import parse_recipe

    assert parse_recipe(recipe).key


def test_the_object_of_the_readme_is_logged(bench):
    text = re.search(r"echo '(\{.*?\})' \| campaign log -", README, re.DOTALL)[1]
    bench.done("add", "cell", "A07", "--electrode", "film E", "--electrolyte", "1 M NaPF6 in PC",
               "--area-cm2", "1", "--reference", "Na/Na+")  # fmt: skip
    logged = bench.done("log", "-", "--json", given=text).json
    assert logged["added"]["measurements"] == 1
    assert json.loads(text)["cell"] == "A07"


def test_every_command_of_the_readme_is_one_of_the_program(bench):
    known = set(re.findall(r"^  (\w+)  ", bench.done("--help").out, re.MULTILINE))
    written = "\n".join(re.findall(r"(?:\$ |`)campaign .*", README))
    named = set(re.findall(r"campaign (\w+)", written))
    assert named and named <= known
