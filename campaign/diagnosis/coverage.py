"""What a campaign has covered: specimens and measurements over pairs of axes, and what lacks."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Any, Final

import numpy as np

from campaign.diagnosis.budget import RESPONSE_OF
from campaign.diagnosis.lazy import trend_evidence
from campaign.diagnosis.next_questions import needed_alpha, predicted
from campaign.diagnosis.signatures import WANTED
from campaign.diagnosis.summary import Outcome, of_electrode, settle
from campaign.diagnosis.wording import Decider, is_testable, numbers, why_open
from campaign.kinetics.constants import ZERO_CELSIUS_K
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import BoolArray, IntArray, Readings, Snapshot
from campaign.trends.conditions import Conditions, condition
from campaign.trends.state import state
from campaign.trends.strata import combine, levels_per_stratum, match

AXES: Final = ("concentration", "solvents", "additives", "salt", "temperature", "potential", "age")

RECIPE: Final = ("concentration", "solvents", "additives", "salt")
WITHIN: Final = ("temperature", "potential", "age")

PAIRS: Final = (
    ("concentration", "solvents"), ("potential", "temperature"), ("solvents", "additives"),
    ("temperature", "solvents"), ("age", "solvents"),
)  # fmt: skip
"""The pairs shown where both axes say something; others are in the plain data."""

AGES_d: Final = ((1.0, "under 1 d"), (7.0, "1 to 7 d"), (28.0, "1 to 4 weeks"))
OLDEST: Final = "over 4 weeks"
UNKNOWN: Final = "not recorded"


@dataclass(frozen=True)
class Levels:
    """The levels of one axis: names in order, and the level of every reading [n]."""

    axis: str
    names: tuple[str, ...]
    code: IntArray


@dataclass(frozen=True)
class Matrix:
    """Specimens and measurements at every combination of two axes, each (rows, columns).

    row_contrast, column_contrast: the levels of the row (column) axis are compared under equal
    conditions there: some stratum of everything else holds two of them.
    """

    row_axis: str
    column_axis: str
    rows: tuple[str, ...]
    columns: tuple[str, ...]
    specimens: tuple[tuple[int, ...], ...]
    measurements: tuple[tuple[int, ...], ...]
    row_contrast: tuple[tuple[bool, ...], ...]
    column_contrast: tuple[tuple[bool, ...], ...]

    def as_dict(self) -> dict[str, Any]:
        """Return the matrix as JSON-ready data."""
        return {name: getattr(self, name) for name in (
            "row_axis", "column_axis", "rows", "columns", "specimens", "measurements",
            "row_contrast", "column_contrast",
        )}  # fmt: skip


@dataclass(frozen=True)
class Lack:
    """What one diagnostic of the judged term lacks, in words; '' where it is decided."""

    response: str
    axis: str
    decision: str
    text: str


@dataclass(frozen=True)
class Coverage:
    """What has been covered of one electrode."""

    electrode: str
    n_specimens: int
    n_measurements: int
    levels: Mapping[str, Mapping[str, int]]
    matrices: tuple[Matrix, ...]
    lacks: tuple[Lack, ...]

    def as_dict(self) -> dict[str, Any]:
        """Return the coverage as JSON-ready data."""
        return {
            "electrode": self.electrode,
            "n_specimens": self.n_specimens,
            "n_measurements": self.n_measurements,
            "levels": {axis: dict(found) for axis, found in self.levels.items()},
            "matrices": [one.as_dict() for one in self.matrices],
            "missing": [one.__dict__ for one in self.lacks],
        }


def coverage(
    snapshot: Snapshot,
    criteria: Criteria,
    *,
    electrodes: Sequence[str] | None = None,
    every_pair: bool = False,
) -> list[Coverage]:
    """Return what has been covered of every electrode with readings, in alphabetical order.

    electrodes: only these. every_pair: matrices of all pairs of axes with two levels and more.
    """
    labels = sorted(set(snapshot.readings.electrode.tolist()))
    return [
        _of_one(of_electrode(snapshot, label), criteria, label, every_pair)
        for label in labels
        if electrodes is None or label in electrodes
    ]


def _of_one(part: Snapshot, criteria: Criteria, electrode: str, every_pair: bool) -> Coverage:
    r = part.readings
    levels = {axis: levels_of(r, criteria, axis) for axis in AXES}
    c = condition(part, criteria, electrode)
    compared = {axis: compared_on(c, levels, axis) for axis in AXES}
    pairs = combinations(AXES, 2) if every_pair else PAIRS
    matrices = tuple(
        matrix(r, levels, compared, a, b) for a, b in pairs
        if len(levels[a].names) > 1 or len(levels[b].names) > 1
    )  # fmt: skip
    outcome = settle(part, criteria, electrode, trend_evidence)
    return Coverage(
        electrode,
        len(set(r.specimen.tolist())),
        len(r),
        {axis: _counts(r, one) for axis, one in levels.items()},
        matrices,
        lacks(outcome, criteria.error_probability),
    )


def levels_of(r: Readings, criteria: Criteria, axis: str) -> Levels:
    """Return the levels of one axis of the readings, as they are told to a person."""
    if axis in ("solvents", "additives", "salt"):
        texts = [str(text) or UNKNOWN for text in getattr(r, axis)]
        return _named(axis, texts, sorted(set(texts)))
    if axis == "concentration":
        texts = [f"{c:.4g} {basis}" for c, basis in zip(r.concentration, r.basis, strict=True)]
        order = sorted(set(texts), key=lambda one: (one.split()[1], float(one.split()[0])))
        return _named(axis, texts, order)
    if axis == "age":
        return _ages(r)
    values = r.temperature_K if axis == "temperature" else r.potential_V
    tolerance = (
        criteria.temperature_tolerance_K if axis == "temperature"
        else criteria.potential_tolerance_V
    )  # fmt: skip
    return _matched(axis, r, values, tolerance)


def _named(axis: str, texts: Sequence[str], names: Sequence[str]) -> Levels:
    place = {name: code for code, name in enumerate(names)}
    return Levels(axis, tuple(names), np.array([place[one] for one in texts], np.int64))


def _matched(axis: str, r: Readings, values: Any, tolerance: float) -> Levels:
    """Return the levels of a number; potentials of several references stay apart."""
    several = axis == "potential" and len(set(r.reference.tolist())) > 1
    texts = [UNKNOWN] * len(r)
    order: list[str] = []
    references = sorted(set(r.reference.tolist())) if axis == "potential" else [None]
    for reference in references:
        mine = np.flatnonzero(
            np.isfinite(values) & (True if reference is None else r.reference == reference)
        )
        codes = match(values[mine], tolerance).codes
        for code in range(int(codes.max(initial=-1)) + 1):
            rows = mine[codes == code]
            mean = float(np.median(values[rows]))
            name = (
                f"{mean - ZERO_CELSIUS_K:.0f} °C" if axis == "temperature"
                else f"{mean:.3g} V" + (f" {reference}" if several else "")
            )  # fmt: skip
            if name in order:  # two levels that round alike
                name = f"{mean - ZERO_CELSIUS_K:.1f} °C" if axis == "temperature" else (
                    f"{mean:.4f} V" + (f" {reference}" if several else "")
                )
            order.append(name)
            for row in rows:
                texts[int(row)] = name
    if UNKNOWN in texts:
        order.append(UNKNOWN)
    return _named(axis, texts, order)


def _ages(r: Readings) -> Levels:
    """Return classes of age since assembly, else since the cell's first measurement."""
    first: dict[str, float] = {}
    for cell, instant in zip(r.cell, r.measured_at, strict=True):
        first[cell] = min(first.get(cell, np.inf), float(instant))
    start = [
        float(assembled) if np.isfinite(assembled) else first[cell]
        for cell, assembled in zip(r.cell, r.assembled_at, strict=True)
    ]
    days = (r.measured_at - np.array(start, np.float64)) / 86400.0
    texts = [_age_class(float(one)) for one in days]
    names = [*(name for _, name in AGES_d), OLDEST, UNKNOWN]
    return _named("age", texts, [name for name in names if name in set(texts)])


def _age_class(days: float) -> str:
    if not np.isfinite(days):
        return UNKNOWN
    return next((name for below, name in AGES_d if days < below), OLDEST)


def _counts(r: Readings, levels: Levels) -> dict[str, int]:
    """Return the number of specimens at each level."""
    return {
        name: len(set(r.specimen[levels.code == code].tolist()))
        for code, name in enumerate(levels.names)
    }


def matrix(
    r: Readings,
    levels: Mapping[str, Levels],
    compared: Mapping[str, BoolArray],
    row_axis: str,
    column_axis: str,
) -> Matrix:
    """Return the matrix of two axes; `compared` [n] by axis marks the strata with contrast."""
    a, b = levels[row_axis], levels[column_axis]
    shape = (len(a.names), len(b.names))
    specimen = np.unique(r.specimen.astype(str), return_inverse=True)[1]
    specimens = np.zeros(shape, np.int64)
    measurements = np.zeros(shape, np.int64)
    for i in range(shape[0]):
        for j in range(shape[1]):
            mine = (a.code == i) & (b.code == j)
            measurements[i, j] = int(mine.sum())
            specimens[i, j] = len(np.unique(specimen[mine]))
    return Matrix(
        row_axis, column_axis, a.names, b.names, _ints(specimens), _ints(measurements),
        _bools(_contrast(a, b, compared[row_axis])), _bools(_contrast(a, b, compared[column_axis])),
    )  # fmt: skip


def _contrast(a: Levels, b: Levels, compared: BoolArray) -> BoolArray:
    """Return which entries of the matrix hold a reading that is compared."""
    found = np.zeros((len(a.names), len(b.names)), np.bool_)
    found[a.code[compared], b.code[compared]] = True
    return found


def compared_on(c: Conditions, levels: Mapping[str, Levels], axis: str) -> BoolArray:
    """Return which readings [n] stand in a stratum with two levels of the axis.

    The strata are those of the trends: recipes are compared at equal temperature and state of
    the electrode, temperature and potential within a cell, age at equal temperature and
    potential within a cell.
    """
    held_state = state(c)
    if axis == "temperature":
        stratum, level = combine(c.specimen, c.cell, held_state.code), c.temperature
    elif axis == "potential":
        stratum, level = combine(c.specimen, c.cell, c.temperature, c.scale), c.fixed
    elif axis == "age":
        stratum = combine(c.cell, c.temperature, c.scale, c.fixed)
        level = np.unique(c.age_s, return_inverse=True)[1].astype(np.int64)
    else:
        recipe = [levels[one].code for one in RECIPE if one != axis]
        stratum, level = combine(*recipe, c.temperature, held_state.code), levels[axis].code
    several = np.asarray(levels_per_stratum(stratum, level) > 1, np.bool_)
    return several if axis in WITHIN else several & held_state.held


def _ints(table: Any) -> tuple[tuple[int, ...], ...]:
    return tuple(tuple(int(one) for one in row) for row in table)


def _bools(table: Any) -> tuple[tuple[bool, ...], ...]:
    return tuple(tuple(bool(one) for one in row) for row in table)


def lacks(outcome: Outcome, alpha: float) -> tuple[Lack, ...]:
    """Return what each diagnostic of the judged terms lacks, in words."""
    found = []
    for term, judged in outcome.judged.items():
        for axis in predicted(judged.response):
            finding = judged.evidence.get(axis)
            decision, text = _lack(axis, finding, alpha, needed_alpha(judged.response, axis, alpha))
            found.append(Lack(RESPONSE_OF[term], axis, decision, text))
    return tuple(found)


def _lack(axis: str, finding: Decider | None, alpha: float, strict: float) -> tuple[str, str]:
    if finding is None or not is_testable(finding):
        return "open", f"not tested ({why_open(finding) or 'never measured'}): {WANTED[axis]}"
    figure = numbers(axis, finding, alpha)
    reason = why_open(finding)
    if reason:
        return "open", f"{reason}" + (f" ({figure})" if figure else "")
    decision = finding.decision(alpha)
    if decision == "open":
        return decision, f"more cells ({figure})" if figure else "more cells"
    if strict < alpha and finding.decision(strict) == "open":
        return decision, (
            f"decided at {1 - alpha:.0%}, but a step is eliminated at {1 - strict:.1%} only: "
            f"more cells ({figure})"
        )
    return decision, ""


def covered(
    db: str | None, wanted: Any, electrode: str | None, every_pair: bool = False
) -> dict[str, Any]:
    """Return the coverage of a campaign as plain data: a row an electrode."""
    from campaign.trends.reading import read_campaign

    taken, criteria = read_campaign(db, wanted)
    chosen = None if electrode is None else [electrode]
    found = coverage(taken, criteria, electrodes=chosen, every_pair=every_pair)
    return {"rows": [one.as_dict() for one in found]}
