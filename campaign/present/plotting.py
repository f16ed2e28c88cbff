"""Small plots in text, for a look at a trend without leaving the terminal."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

from campaign.present.numbers import significant
from campaign.trends.curves import Curve
from campaign.trends.results import AxisResult, RatioEstimate

WIDE, HIGH = 60, 13
LETTERS = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"
LINE = "."

Scale = Callable[[float], float]

X_AXIS: dict[str, tuple[str, Scale]] = {
    "concentration": ("c, logarithmic", math.log),
    "temperature": ("T/K, as 1/T", lambda kelvin: -1.0 / kelvin),
    "potential": ("E/V", float),
    "age": ("age/d", float),
}


def trend_plot(result: AxisResult, curves: Sequence[Curve]) -> str:
    """Return a text plot of every curve, or of all pairs of solvents or additives."""
    if result.axis not in X_AXIS:
        pairs = [one for one in result.estimates if isinstance(one, RatioEstimate)]
        return _pairs(pairs, result.response)
    return "\n".join(_curve(result, one) for one in curves)


def _curve(result: AxisResult, curve: Curve) -> str:
    name, scale = X_AXIS[result.axis]
    xs = [scale(float(x)) for x in curve.x]
    ys = [math.log(float(y)) for y in curve.y]
    line = curve.lines[0] if curve.lines else None
    places = [] if line is None else [
        (scale(float(x)), math.log(float(y))) for x, y in zip(line.x, line.y, strict=True)
    ]  # fmt: skip
    grid = _Grid(xs + [x for x, _ in places], ys + [y for _, y in places])
    for x, y in places:
        grid.put(x, y, LINE)
    specimens = sorted(set(curve.specimen))
    letter = {one: LETTERS[i % len(LETTERS)] for i, one in enumerate(specimens)}
    for x, y, specimen in zip(xs, ys, curve.specimen, strict=True):
        grid.put(x, y, letter[specimen])
    estimate = curve.estimate
    additives = "" if estimate.additives in ("", "none") else f" + {estimate.additives}"
    what = f"{result.response} / ({result.unit})" if result.axis != "age" else (
        f"{result.response} / {result.response}(new)"
    )  # fmt: skip
    head = f"{estimate.electrode}, {estimate.salt} in {estimate.solvents}{additives}"
    low, high = (significant(float(end), 3) for end in (min(curve.x), max(curve.x)))
    foot = f"{low.ljust(WIDE // 2 - len(name) // 2)}{name}".ljust(WIDE - 8) + f"{high:>8}"
    key = ", ".join(f"{letter[one]} {one}" for one in specimens[:8])
    more = f" and {len(specimens) - 8} more" if len(specimens) > 8 else ""
    return "\n".join(
        ["", f"{head}: {what}, logarithmic", *grid.lines(), " " * 10 + foot,
         " " * 10 + f"specimens {key}{more}; {LINE} fitted"]
    )  # fmt: skip


class _Grid:
    """A field of characters that points are put into."""

    def __init__(self, xs: Sequence[float], ys: Sequence[float]) -> None:
        self.low_x, self.wide = min(xs), (max(xs) - min(xs)) or 1.0
        self.low_y, self.high = min(ys), (max(ys) - min(ys)) or 1.0
        self.field = [[" "] * WIDE for _ in range(HIGH)]

    def put(self, x: float, y: float, mark: str) -> None:
        column = round((x - self.low_x) / self.wide * (WIDE - 1))
        row = HIGH - 1 - round((y - self.low_y) / self.high * (HIGH - 1))
        self.field[row][column] = mark

    def lines(self) -> list[str]:
        found = []
        for index, row in enumerate(self.field):
            label = ""
            if index in (0, HIGH // 2, HIGH - 1):
                at = self.low_y + self.high * (HIGH - 1 - index) / (HIGH - 1)
                label = significant(math.exp(at), 3)
            found.append(f"{label:>8} |{''.join(row).rstrip()}")
        found.append(" " * 9 + "+" + "-" * WIDE)
        return found


def _pairs(pairs: Sequence[RatioEstimate], response: str) -> str:
    """Return one row a pair: its ratio and interval on a common logarithmic scale."""
    ends = [
        min(max(end, 0.05), 20.0)
        for one in pairs
        for end in (*(one.ratio_ci or ()), one.ratio, 0.5, 2.0)
    ]
    if not ends:
        return ""
    low, high = math.log(min(ends)), math.log(max(ends))

    def at(value: float) -> int:
        place = (math.log(min(max(value, math.exp(low)), math.exp(high))) - low) / (high - low)
        return round(place * (WIDE - 1))

    names = [f"{one.electrode}: {one.a} / {one.b}" for one in pairs]
    room = min(max(map(len, names)), 38)
    lines = ["", f"{response}(a)/{response}(b), logarithmic, : at 1"]
    for name, one in zip(names, pairs, strict=True):
        row = [" "] * WIDE
        row[at(1.0)] = ":"
        if one.ratio_ci is not None:
            for column in range(at(one.ratio_ci[0]), at(one.ratio_ci[1]) + 1):
                row[column] = "-"
            row[at(one.ratio_ci[0])] = row[at(one.ratio_ci[1])] = "|"
        row[at(one.ratio)] = "o"
        lines.append(f"{name[:room].ljust(room)} {''.join(row).rstrip()}")
    first, last = significant(math.exp(low), 2), significant(math.exp(high), 2)
    foot = first.ljust(WIDE - 6) + f"{last:>6}"
    return "\n".join([*lines, " " * (room + 1) + foot])
