"""The campaign in Python: the same queries as on the command line, as data frames.

    from campaign import open_campaign

    with open_campaign("campaign.sqlite") as campaign:
        orders = campaign.trend("concentration", electrode="NFM film A")
        orders[["solvents", "order", "order_low", "order_high", "decision"]]
        orders.attrs["units"]["sigma_between"]

Every frame carries the units of its columns in `attrs["units"]`. What cannot be done raises
`campaign.errors.Refused`, whose text says what was found and what was expected.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from datetime import date, datetime
from os import PathLike, fspath
from typing import TYPE_CHECKING, Any, TypedDict, Unpack

from campaign.errors import refused

if TYPE_CHECKING:
    import pandas as pd
    from sqlalchemy import Connection

    from campaign.ledger.database import Database
    from campaign.ledger.filters import Filter

Row = dict[str, Any]
Bounds = str | tuple[float | None, float | None]


class Conditions(TypedDict, total=False):
    """What a query may be narrowed to; all of them together.

    salt, solvents, additives as recipes write them. potential [V] as measured and temperature
    [degC]: (low, high) with None for an open end, or 'low:high'. since, until: by measurement;
    as_of: as logged by the end of that day.
    """

    electrode: str
    salt: str
    solvents: str
    additives: str
    potential: Bounds
    temperature: Bounds
    since: str | date
    until: str | date
    as_of: str | date


def open_campaign(db: str | PathLike[str] | None = None) -> Campaign:
    """Return the campaign at a path or URL, else at CAMPAIGN_DB, else campaign.sqlite here.

    Raises Refused where there is none, or one of another version.
    """
    from campaign.ledger.database import open_database

    return Campaign(open_database(None if db is None else fspath(db)), db)


class Campaign:
    """An open campaign. Each query reads one state; nothing is held open between queries."""

    def __init__(self, database: Database, db: str | PathLike[str] | None) -> None:
        self._opened: Database | None = database
        self._db = None if db is None else fspath(db)

    def __enter__(self) -> Campaign:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def __repr__(self) -> str:
        where = self._opened.where.shown if self._opened is not None else "closed"
        return f"<campaign at {where}>"

    def close(self) -> None:
        """Let go of the database; further queries are refused."""
        if self._opened is not None:
            self._opened.engine.dispose()
            self._opened = None

    @property
    def _database(self) -> Database:
        if self._opened is None:
            raise refused("this campaign was closed; open it again with open_campaign")
        return self._opened

    # Records -------------------------------------------------------------------------------

    def electrodes(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the electrodes in force, one a row, indexed by record number."""
        return self._listed("electrodes", conditions)

    def electrolytes(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the electrolytes in force, one a row, indexed by record number."""
        return self._listed("electrolytes", conditions)

    def cells(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the cells in force, one a row, indexed by record number."""
        return self._listed("cells", conditions)

    def measurements(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the measurements in force with their current fits, indexed by record number.

        Fitted values are as fitted; an arc that was looked for and is absent is NaN in its
        column and True in the column `<quantity>_absent`.
        """
        return self._listed("measurements", conditions)

    def fits(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the current fits, one a row, indexed by record number."""
        return self._listed("fits", conditions)

    def history(self) -> pd.DataFrame:
        """Return the journal, oldest first, indexed by entry number."""
        from campaign.ledger.history import history

        with self._database.reading() as connection:
            return _frame(history(connection), "entry")

    # Answers -------------------------------------------------------------------------------

    def trend(
        self,
        axis: str,
        response: str = "R_ct",
        *,
        porous: bool = True,
        scale: str | None = None,
        without: Sequence[str | int] = (),
        **conditions: Unpack[Conditions],
    ) -> pd.DataFrame:
        """Return the estimates of one axis, one a row; intervals as `<name>_low`, `<name>_high`.

        axis: concentration, solvent, additive, potential, temperature or age. porous: solve
        R_ct from the apparent value of porous electrodes. scale: compare potentials on this
        reference's scale. without: measurements or specimens to leave out. `attrs` also holds
        what was left out, warnings, and the differences between barriers.
        """
        from campaign.trends.reading import rebuilt

        result = rebuilt(
            axis, self._where(), self._filter(conditions), response=response, porous=porous,
            scale=scale, without=[str(one) for one in without],
        ).as_dict()  # fmt: skip
        frame = _frame([_flat(row) for row in result["estimates"]])
        frame.attrs |= {
            name: result[name]
            for name in ("axis", "response", "unit", "differences", "left_out", "warnings")
        }
        return frame

    def summary(self, **conditions: Unpack[Conditions]) -> pd.DataFrame:
        """Return the rate-limiting-step table, one electrode a row.

        `attrs["criteria"]` holds the criteria used, `attrs["rows"]` the rows in full.
        """
        from campaign.diagnosis.reading import summarise

        found = summarise(self._where(), self._filter(conditions))
        frame = _frame([_flat(_headline(row)) for row in found["rows"]])
        frame.attrs |= {"criteria": found["criteria"], "rows": found["rows"],
                        "left_out": found["left_out"]}  # fmt: skip
        return frame

    def explain(self, label: str, /, **conditions: Unpack[Conditions]) -> Row:
        """Return everything behind one electrode's verdict, as `explain --json` gives it."""
        from campaign.diagnosis.reading import explained

        return explained(label, self._where(), self._filter(conditions))

    # Entering ------------------------------------------------------------------------------

    def log(
        self,
        values: Mapping[str, Any] | None = None,
        /,
        *,
        refit: bool = False,
        restore: bool = False,
        by: str | None = None,
        **columns: Any,
    ) -> Row:
        """Log one measurement by the columns of the flat table; return what was added.

        values and columns may hold numbers, texts, datetimes and None; NaN means not fitted.
        The same measurement logged again changes nothing. Raises Refused, nothing written.
        """
        from campaign.ledger.importing import Choices, log_row
        from campaign.ledger.logging import read_row

        stated = {name: _plain(value) for name, value in {**(values or {}), **columns}.items()}
        given = {name: value for name, value in stated.items() if value is not None}
        database = self._database
        row = read_row(database, None, given, None)
        return log_row(database, row, Choices(refit, restore), by).as_dict()

    def import_tables(
        self,
        files: Iterable[str | PathLike[str]],
        *,
        refit: bool = False,
        dry_run: bool = False,
        by: str | None = None,
    ) -> Row:
        """Import flat tables, all rows or none; return what was added. Raises Refused."""
        from campaign.ledger.files import read_files
        from campaign.ledger.importing import Choices, import_tables

        database = self._database
        tables = read_files(database, [fspath(file) for file in files])
        choices = Choices(refit=refit, dry_run=dry_run)
        return import_tables(database, tables, choices, by).as_dict()

    # Behind --------------------------------------------------------------------------------

    def _where(self) -> str | None:
        return self._db if self._database is not None else None

    def _filter(self, conditions: Mapping[str, Any]) -> Any:
        stated = {name: _condition(value) for name, value in conditions.items()}

        def wanted(connection: Connection) -> Filter:
            from campaign.ledger.filters import read_filter

            _refuse_unknown(conditions)
            return read_filter(connection, **stated)

        return wanted

    def _listed(self, kind: str, conditions: Mapping[str, Any]) -> pd.DataFrame:
        from campaign.ledger import selecting

        with self._database.reading() as connection:
            wanted = self._filter(conditions)(connection)
            rows = getattr(selecting, f"list_{kind}")(connection, wanted)
        return _frame([_without_words(row) for row in rows], "record")


def _refuse_unknown(conditions: Mapping[str, Any]) -> None:
    from difflib import get_close_matches

    for name in conditions:
        if name not in Conditions.__annotations__:
            known = list(Conditions.__annotations__)
            near = get_close_matches(name, known, n=2)
            raise refused(
                f"there is no condition '{name}'{'; near: ' + ', '.join(near) if near else ''}",
                value=name,
                expected=", ".join(known),
            )


def _condition(value: Any) -> str | None:
    if isinstance(value, tuple):
        return ":".join("" if end is None else repr(float(end)) for end in value)
    if isinstance(value, (datetime, date)):
        return value.isoformat()
    return None if value is None else str(value)


def _plain(value: Any) -> Any:
    """Return a value as the flat table takes it: NumPy scalars as Python's, NaN as None."""
    if hasattr(value, "item") and not isinstance(value, (str, bytes)):
        value = value.item()
    if isinstance(value, float) and math.isnan(value):
        return None
    return value


def _without_words(row: Row) -> Row:
    """Return a row whose fitted values are numbers: 'absent' moves to a column of its own."""
    from campaign.ledger.quantities import QUANTITIES

    found = dict(row)
    for name in QUANTITIES:
        if found.get(name) == "absent":
            found[name], found[f"{name}_absent"] = math.nan, True
    return found


def _flat(row: Mapping[str, Any]) -> Row:
    """Return a row with intervals as two columns; what is nested stays behind."""
    flat: Row = {}
    for key, value in row.items():
        if key.endswith("_ci"):
            low, high = value or (math.nan, math.nan)
            name = key.removesuffix("_ci")
            flat[f"{name}_low"], flat[f"{name}_high"] = low, high
        elif key in ("rows", "warnings"):
            flat[key] = tuple(value)
        elif not isinstance(value, (dict, list)):
            flat[key] = value
    return flat


def _headline(row: Mapping[str, Any]) -> Row:
    diagnostics = row["diagnostics"]
    names = ("electrode", "n_specimens", "n_measurements", "dominant", "share", "share_ci",
             "verdict", "strength", "text")  # fmt: skip
    found = {name: row[name] for name in names if name in row}
    found["order"] = diagnostics["concentration"].get("order")
    found["order_ci"] = diagnostics["concentration"].get("order_ci")
    found["solvent_ratio"] = diagnostics["solvent"].get("ratio")
    found |= {f"{axis}_decision": one["decision"] for axis, one in diagnostics.items()}
    found["missing"] = "; ".join(row["missing"])
    return found


_UNITS = {
    "area_cm2": "cm2", "potential_V": "V", "temperature_C": "degC", "E_half_V": "V",
    "rest_h": "h", "amplitude_mV": "mV", "f_min_Hz": "Hz", "f_max_Hz": "Hz",
    "diffusion_length_cm": "cm", "diffusivity_cm2_s": "cm2/s", "density_g_cm3": "g/cm3",
    "pore_resistance_ohm_cm2": "ohm cm2", "window_low_V": "V", "window_high_V": "V",
    "maximum_temperature_C": "degC", "minimum_temperature_C": "degC", "ion_content": "1",
    "order": "1", "ratio": "1", "span": "1", "drift": "1", "share": "1", "solvent_ratio": "1",
    "Ea_kJ_mol": "kJ/mol", "Ea": "kJ/mol", "Ea_lnRT_kJ_mol": "kJ/mol", "Ea_lnRT": "kJ/mol",
    "E0_V": "V", "E0": "V", "g": "1", "slope_per_V": "1/V", "slope": "1/V", "window_V": "V",
    "age_span_d": "d", "sigma_within": "1", "sigma_between": "1", "df": "1",
}  # fmt: skip


def _frame(rows: Sequence[Row], index: str | None = None) -> pd.DataFrame:
    """Return rows as a frame with the units of its columns in `attrs`."""
    import pandas as pd

    frame = pd.DataFrame(list(rows))
    for name in frame.columns:
        if name.endswith("_absent"):
            frame[name] = frame[name].eq(True)
        elif name.endswith("_at") or name == "at":
            frame[name] = pd.to_datetime(frame[name], utc=True, format="ISO8601")
    if index is not None and index in frame:
        frame = frame.set_index(index)
    units = {name: unit for name in frame.columns if (unit := _unit(str(name))) is not None}
    for name in units:
        frame[name] = frame[name].astype("float64")
    if "Ea_kJ_mol" in frame:
        units["sigma_between"] = "kJ/mol"
    frame.attrs["units"] = units
    return frame


def _unit(name: str) -> str | None:
    from campaign.ledger.flat.canonical import COLUMNS

    base = name.removesuffix("_low").removesuffix("_high")
    if base in _UNITS:
        return _UNITS[base]
    kind, unit = COLUMNS.get(name, ("", ""))
    return unit if kind in ("value", "error") else None
