"""Invented readings and findings for the tests of the diagnosis."""

from dataclasses import dataclass

import numpy as np
import pytest

from campaign.ledger.readings import QUANTITIES, ElectrodeFacts, Readings, Snapshot
from campaign.statistics.estimate import Estimate
from campaign.trends.findings import Contrast

HALF = Estimate(0.5, 0.05, 8)


@dataclass(frozen=True)
class Says:
    """A finding that says `word` at error probabilities of at least `from_alpha`, else open."""

    word: str
    from_alpha: float = 0.0
    slope: Estimate | None = HALF
    contrasts: tuple[Contrast, ...] = ()
    open_because: str | None = None
    confounded: bool = False
    warnings: tuple[str, ...] = ()
    tested: bool = True
    n_specimens: int = 9
    n_measurements: int = 90

    def decision(self, alpha: float = 0.05) -> str:
        return self.word if alpha >= self.from_alpha else "open"


def never_varied() -> Says:
    return Says("open", slope=None, open_because="one level only", tested=False)


_TEXT = {
    "cell": "", "specimen": "", "electrode": "A", "electrolyte": "1 M NaX in PC", "salt": "NaX",
    "solvents": "PC", "additives": "none", "basis": "mol/L", "configuration": "three-electrode",
    "reference": "Na/Na+",
}  # fmt: skip
_NUMBER = {
    "concentration": 1.0, "area_cm2": 1.0, "potential_V": 3.0, "temperature_K": 298.15,
    "ion_content": np.nan, "E_half_V": np.nan, "measured_at": 0.0, "assembled_at": np.nan,
    "cycle": np.nan,
}  # fmt: skip


def make_readings(rows) -> Readings:
    """Rows are dicts of columns and fitted quantities; 'absent' names absent arcs."""
    n = len(rows)
    columns = {"measurement": np.arange(1, n + 1)}
    for name, default in _TEXT.items():
        values = [row.get(name, default or row.get("specimen", "c1")) for row in rows]
        columns[name] = np.array(values, dtype=object)
    for name, number in _NUMBER.items():
        columns[name] = np.array([float(row.get(name, number)) for row in rows])
    columns["aqueous"] = np.array([bool(row.get("aqueous", False)) for row in rows], dtype=bool)
    values = {q: np.array([float(row.get(q, np.nan)) for row in rows]) for q in QUANTITIES}
    absent = {
        q: np.array([q in row.get("absent", ()) for row in rows], dtype=bool) for q in QUANTITIES
    }
    se = {q: np.full(n, np.nan) for q in QUANTITIES}
    return Readings(**columns, values=values, se=se, absent=absent)


def make_snapshot(rows, **facts) -> Snapshot:
    readings = make_readings(rows)
    labels = sorted(set(readings.electrode.tolist()))
    return Snapshot(
        readings, {label: ElectrodeFacts(label, "oxide", "Na+", 1, **facts) for label in labels}, {}
    )


@pytest.fixture
def says():
    return Says


@pytest.fixture
def readings_of():
    return make_readings


@pytest.fixture
def snapshot_of():
    return make_snapshot


@pytest.fixture
def untested():
    return never_varied()
