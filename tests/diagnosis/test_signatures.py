"""The candidate table, written out as published and compared with the data."""

import pytest

from campaign.diagnosis.signatures import AXES, CANDIDATES, WANTED, candidates

TABLE = """
| step | seen in | control | concentration | solvent | additive | potential | barrier | age |
|---|---|---|---|---|---|---|---|---|
| electrolyte conduction | R_el | ion transport | responds typ | responds typ | - | unresponsive req | - | unresponsive typ |
| electronic contact | R_el, R_sl | electron transfer | unresponsive req | unresponsive req | unresponsive typ | unresponsive typ | unresponsive typ | - |
| migration through the surface layer | R_sl | ion transport | - | solvent or additive responds req | (same) | unresponsive typ | - | responds typ |
| desolvation and adsorption | R_ct | ion transport | responds req | solvent or barrier responds req | - | - | (same) | - |
| coupled ion and electron transfer | R_ct | mixed | responds req | - | - | responds typ | unresponsive req | - |
| electron transfer | R_ct | electron transfer | unresponsive req | unresponsive req | unresponsive typ | responds typ | unresponsive typ | - |
| surface diffusion of adsorbed ions | R_lat | ion transport | responds req | - | - | responds typ | - | - |
| incorporation into the lattice | R_lat | host | unresponsive req | unresponsive typ | - | responds typ | unresponsive typ | - |
| salt diffusion in the electrolyte | sigma_w | ion transport | responds req | responds typ | - | unresponsive req | - | - |
| solid-state diffusion | sigma_w | host | unresponsive req | unresponsive req | - | responds typ | unresponsive typ | - |
"""  # noqa: E501


def rows():
    lines = [line for line in TABLE.strip().splitlines() if not line.startswith("|---")]
    cells = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines]
    return cells[0], cells[1:]


def predictions(header, cells):
    """Return {(axes, outcome, required)} of one row of the table."""
    found = set()
    for axis, cell in zip(header[3:], cells[3:], strict=True):
        if cell in ("-", "(same)"):
            continue
        *words, kind = cell.split()
        outcome = words.pop()
        axes = tuple(word for word in words if word != "or") or (axis,)
        found.add((axes, outcome, {"req": True, "typ": False}[kind]))
    return found


def test_the_table_has_the_axes_of_the_data():
    assert tuple(rows()[0][3:]) == AXES
    assert set(WANTED) == set(AXES)


@pytest.mark.parametrize("index", range(10))
def test_a_row_of_the_table_is_a_step_of_the_data(index):
    header, table = rows()
    cells, step = table[index], CANDIDATES[index]
    assert step.name == cells[0]
    assert step.seen_in == tuple(cells[1].split(", "))
    assert step.control == cells[2]
    stated = [(one.axes, one.outcome, one.required) for one in step.predictions]
    assert len(stated) == len(set(stated))
    assert set(stated) == predictions(header, cells)


def test_nothing_beyond_the_table():
    assert len(CANDIDATES) == len(rows()[1]) == 10


def test_only_migration_needs_its_arc():
    assert {step.name: step.needs_arc for step in CANDIDATES if step.needs_arc} == {
        "migration through the surface layer": "R_sl"
    }


def test_electronic_contact_is_a_candidate_of_two_terms():
    for response in ("R_el", "R_sl"):
        assert "electronic contact" in [step.name for step in candidates(response)]
    assert [step.name for step in candidates("R_ct")] == [
        "desolvation and adsorption", "coupled ion and electron transfer", "electron transfer",
    ]  # fmt: skip
