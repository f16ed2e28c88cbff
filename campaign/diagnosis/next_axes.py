"""From the readings of one axis to its planning problem: between-specimen axes and barriers."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from campaign.diagnosis.next_cells import Condition, condition_of, like
from campaign.diagnosis.next_layouts import Known, Layout, Slot, Units, build
from campaign.diagnosis.next_limits import Limits, recipe_of
from campaign.diagnosis.next_power import Rule, Scatter
from campaign.kinetics.constants import GAS_CONSTANT
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import FloatArray, IntArray, Readings, Snapshot
from campaign.statistics.equivalence import Family
from campaign.trends import between, concentration, levels
from campaign.trends.barriers import barriers, usable
from campaign.trends.between import NoContrast
from campaign.trends.findings import Finding
from campaign.trends.sample import SERIES, Sample, attempt, comparable
from campaign.trends.strata import combine

MOST_REPEATS = 4
FEWEST_TEMPERATURES = 3
UNMEASURED_SCATTER = 0.15
"""Relative scatter between cells [1] where a campaign has no two alike (common practice, no
source)."""

UNMEASURED_DF = 3.0
"""Degrees of freedom that such a scatter is given [1]."""

PRIOR_DF = 4.0
"""Degrees of freedom the scatter of the campaign's other electrodes is worth at most [1]."""


@dataclass(frozen=True)
class Scene:
    """What every axis of one response is planned from.

    whole: all readings of the response; known: the scatter between cells of one electrolyte,
    of this electrode and of the others; pool_note: what had to be assumed of it.
    """

    snapshot: Snapshot
    criteria: Criteria
    electrode: str
    whole: Sample
    limits: Limits
    known: Known
    pool_note: str = ""

    @property
    def scatter(self) -> Scatter | None:
        """Return the scatter between cells of one electrolyte."""
        return self.known.own or self.known.others

    @property
    def readings(self) -> Readings:
        """Return the readings of the whole campaign."""
        return self.snapshot.readings

    def rows(self, s: Sample) -> IntArray:
        """Return where the readings of a sample stand in the campaign's readings."""
        order = np.argsort(self.readings.measurement, kind="stable")
        found = np.searchsorted(self.readings.measurement[order], s.c.measurement)
        return np.asarray(order[found], np.int64)


@dataclass(frozen=True)
class Unplannable(Exception):
    """More cells of the kinds allowed cannot decide an axis; `why` says what would."""

    why: str

    def __str__(self) -> str:
        return self.why


@dataclass(frozen=True)
class Recipe:
    """A recipe the campaign knows, with the keys the axes go by."""

    text: str
    salt: str
    solvents: str
    additives: str
    basis: str
    aqueous: bool
    concentration: float

    def key(self, names: Sequence[str]) -> tuple[str, ...]:
        """Return the texts of some of the columns."""
        return tuple(str(getattr(self, name)) for name in names)


def scene(
    snapshot: Snapshot, criteria: Criteria, electrode: str, whole: Sample,
    others: Sequence[Sample] = (),
) -> Scene:  # fmt: skip
    """Return the scene of one response of one electrode.

    others: the same response of the campaign's other electrodes.
    """
    own = pooled(whole)
    known = Known(own, _prior([one for one in map(pooled, others) if one is not None]))
    note = ""
    if known.own is None and known.others is None and len(whole):
        note = f"no two cells are alike: a scatter of {UNMEASURED_SCATTER:.0%} is taken"
        known = Known(Scatter(UNMEASURED_SCATTER**2, UNMEASURED_DF), None)
    return Scene(snapshot, criteria, electrode, whole, Limits(snapshot, electrode), known, note)


def _prior(found: Sequence[Scatter]) -> Scatter | None:
    """Return the mean scatter of other electrodes, worth a few degrees of freedom."""
    if not found:
        return None
    df = sum(one.df for one in found)
    typical = sum(one.typical * one.df for one in found) / df
    return Scatter(typical, min(df, PRIOR_DF))


def pooled(whole: Sample) -> Scatter | None:
    """Return the scatter between cells of one electrolyte, all electrolytes together.

    None where no two cells are alike.
    """
    try:
        s = comparable(whole)
        if len(s) < 2:
            return None
        stratum = combine(s.c.temperature, s.state, s.c.electrolyte)
        units = cell_units(s, stratum, s.c.electrolyte, s.c.electrolyte)[0]
    except (NoContrast, ValueError):
        return None
    code = np.unique(units.group, return_inverse=True)[1]
    count = np.bincount(code)
    rest = units.y - (np.bincount(code, units.y) / count)[code]
    df = float(len(units) - len(count))
    square = float(rest @ rest)
    if df < 1 or not square > 0:
        return None
    k = float(np.median(units.k)) if units.within > 0 else 0.0
    return Scatter(square / df, df, units.within, units.df_within, k)


def cell_units(
    s: Sample, stratum: IntArray, level: IntArray, held: IntArray
) -> tuple[Units, IntArray]:
    """Return one unit a cell (strata taken out), and the unit's group of each reading's `held`.

    The group of a unit is the code of the strata it is linked to.
    """
    r = between.reduced(s, combine(stratum))
    per_cell = np.bincount(r.cell).astype(np.float64)
    cells, strata = len(per_cell), int(combine(stratum).max()) + 1
    df = len(s) - cells - strata + int(r.component.max()) + 1
    within = 0.0
    if not math.isnan(r.sigma_within) and df > 0:
        within = float(np.median(r.sample.known * per_cell))
    units = Units(
        r.sample.y, 1.0 / per_cell, level[r.first], r.component, within,
        float(df) if df > 0 else math.inf,
    )  # fmt: skip
    return units, r.component[r.cell]


def catalogue(where: Scene) -> list[Recipe]:
    """Return every recipe recorded in the campaign that holds the electrode's ion."""
    from campaign.chemistry.concentrations import ion_concentration

    ion = where.whole.c.facts.ion.rstrip("+0123456789")
    found = []
    for text in sorted(where.snapshot.electrolytes):
        recipe = recipe_of(text)
        if recipe is None:
            continue
        amount = ion_concentration(recipe, ion)
        if amount is not None:
            found.append(
                Recipe(text, recipe.salt_key, recipe.solvent_key, recipe.additive_key,
                       recipe.basis, recipe.aqueous, amount)
            )  # fmt: skip
    return found


def measured(where: Scene, s: Sample) -> dict[int, Recipe]:
    """Return the recipe of each coded electrolyte of a sample."""
    r, rows = where.readings, where.rows(s)
    found = {}
    for code in np.unique(s.c.electrolyte):
        at = int(np.flatnonzero(s.c.electrolyte == code)[0])
        row = int(rows[at])
        found[int(code)] = Recipe(
            str(r.electrolyte[row]), str(r.salt[row]), str(r.solvents[row]),
            str(r.additives[row]), s.c.name("basis", int(s.c.basis[at])), bool(r.aqueous[row]),
            float(s.c.concentration[at]),
        )  # fmt: skip
    return found


Key = Callable[[Recipe], tuple[str, ...]]


@dataclass(frozen=True)
class Axis:
    """How one axis reads a recipe: its level and the group of what is held."""

    name: str
    held: tuple[str, ...]
    level: Callable[[Recipe], str]

    def group(self, recipe: Recipe) -> tuple[str, ...]:
        """Return what is held of a recipe while the level changes."""
        texts = recipe.key([one for one in self.held if one != "concentration"])
        if "concentration" not in self.held:
            return texts
        return (*texts, f"{recipe.concentration:.3g}")


CONCENTRATION = Axis("concentration", SERIES, lambda one: f"{one.concentration:.6g}")
SOLVENT = Axis(
    "solvent", ("salt", "additives", "basis", "concentration"), lambda one: one.solvents
)
ADDITIVE = Axis(
    "additive", ("salt", "solvents", "basis", "concentration"), lambda one: one.additives
)
BARRIER = replace(SOLVENT, name="barrier")
AXES = {one.name: one for one in (CONCENTRATION, SOLVENT, ADDITIVE, BARRIER)}


def rule_of(axis: str, criteria: Criteria, alpha: float, family: Family) -> Rule:
    """Return what decides an axis."""
    if axis == "barrier":
        return Rule(criteria.barrier_margin_kJ_mol, alpha, family)
    slope = criteria.order_margin if axis == "concentration" else None
    return Rule(math.log(criteria.ratio_margin), alpha, family, slope)


def layout(where: Scene, axis: str, finding: Finding, alpha: float, new: bool) -> Layout:
    """Return the planning problem of a between-specimen axis or of the barriers.

    new: recipes of the campaign that this axis has not used yet may be proposed as well.
    Raises Unplannable with the reason.
    """
    if finding.open_because is not None and finding.tested:
        raise Unplannable(held_open(finding.open_because))
    how = AXES[axis]
    if not finding.tested:
        return _untested(where, how, finding, alpha)
    return _tested(where, how, finding, alpha, new, *_sample(where, how))


def held_open(reason: str) -> str:
    """Return what would settle an axis that a stated reason holds open."""
    return {
        "potential not comparable": "more cells do not help while the state of the electrode is "
        "not held: record the ion content or the half-filling potential, or measure against the "
        "ion's own electrode",
    }.get(reason, f"more cells alone do not help: {reason}")


def _sample(where: Scene, how: Axis) -> tuple[Sample, Sample]:
    """Return the readings that are compared on an axis (barriers: one row a barrier), and the
    readings the conditions of new cells are taken from.

    As the trends do it, without the fit: strata with one level only are left out.
    """
    try:
        if how.name == "barrier":
            readings, _ = usable(comparable(where.whole))
            return attempt(where.whole, lambda part: _barriers(where, how, part)), readings
        s = attempt(where.whole, lambda part: _compared(where, how, part))
        return s, s
    except NoContrast as reason:  # the finding said otherwise a moment ago
        raise Unplannable(str(reason)) from reason


def _barriers(where: Scene, how: Axis, part: Sample) -> Sample:
    return _compared(where, how, barriers(*usable(part)).by_specimen)


def _compared(where: Scene, how: Axis, part: Sample) -> Sample:
    if not len(part):
        raise NoContrast(f"no readings with {part.response}")
    recipes = measured(where, part)
    level = _levels(part, recipes, how)[1]
    stratum = combine(part.c.temperature, part.state, _coded(part, recipes, how.group))
    lone = between.lone(stratum, level)
    if lone.all():
        raise NoContrast("no stratum holds two levels under equal conditions")
    return part.leaving(lone, between.NO_STRATUM_CONTRAST)


def _tested(
    where: Scene, how: Axis, finding: Finding, alpha: float, new: bool,
    s: Sample, readings: Sample,
) -> Layout:  # fmt: skip
    recipes = measured(where, s)
    stratum_held = _coded(s, recipes, how.group)
    names, level = _levels(s, recipes, how)
    if how.name == "barrier":
        units, unit_group = _barrier_units(s, stratum_held, level)
    else:
        stratum = combine(s.c.temperature, s.state, stratum_held)
        units, unit_group = cell_units(s, stratum, level, stratum_held)
    groups = {how.group(recipes[int(e)]): int(g)
              for e, g in zip(s.c.electrolyte, unit_group, strict=True)}  # fmt: skip
    conditions = _conditions(where, how, readings)
    if new:
        names = _further(where, how, names, groups)
    slots = _slots(where, how, recipes, names, groups, conditions, new)
    if not slots:
        raise Unplannable("no condition that may be proposed lies inside the limits")
    slots, repeats = _repeated(slots, units)
    return _built(where, how, finding, alpha, units, slots, names, len(set(unit_group)), repeats)


def _built(
    where: Scene, how: Axis, finding: Finding, alpha: float, units: Units,
    slots: Sequence[Slot], names: Sequence[str], n_groups: int, repeats: int,
    assumed: tuple[str, ...] = (),
) -> Layout:  # fmt: skip
    base = names.index("none") if how.name == "additive" and "none" in names else None
    family: Family = "single"
    if how.name != "concentration":
        family = "tukey" if base is None else "dunnett"
    made = build(
        units, slots,
        rule=rule_of(how.name, where.criteria, alpha, family),
        n_levels=len(names), n_groups=n_groups, finding=finding, names=names,
        unit={"concentration": "order", "barrier": "kJ/mol"}.get(how.name, "factor"),
        known=Known() if how.name == "barrier" and finding.tested else where.known,
        x=np.log([float(one) for one in names]) if how.name == "concentration" else None,
        base=base,
        k_new=float(np.median(units.k)) if how.name == "barrier" else 1.0 / repeats,
        assumed=assumed,
    )  # fmt: skip
    if made is None:
        raise Unplannable("the scatter between cells is not known: no two cells are alike")
    return made


def _coded(s: Sample, recipes: dict[int, Recipe], key: Key) -> IntArray:
    """Return a code [n] of a recipe's key, in order of the keys."""
    texts = {code: key(recipe) for code, recipe in recipes.items()}
    order = {text: place for place, text in enumerate(sorted(set(texts.values())))}
    return np.array([order[texts[int(code)]] for code in s.c.electrolyte], np.int64)


def _levels(
    s: Sample, recipes: dict[int, Recipe], how: Axis
) -> tuple[list[str], IntArray]:
    """Return the names of the levels, as the finding names them, and their codes [n]."""
    if how.name == "concentration":
        code, _ = levels.group_levels(np.log(s.c.concentration), concentration.SAME_LEVEL)
        code = combine(code)
        return [f"{value:.6g}" for value in levels.medians(s.c.concentration, code)], code
    names = sorted({how.level(recipe) for recipe in recipes.values()})
    position = {name: place for place, name in enumerate(names)}
    column = [position[how.level(recipes[int(code)])] for code in s.c.electrolyte]
    return names, np.array(column, np.int64)


def _barrier_units(s: Sample, held: IntArray, level: IntArray) -> tuple[Units, IntArray]:
    """Return one unit a barrier; the variance of a reading stands for that of a slope."""
    within = float(np.median(s.known)) if len(s) else 0.0
    k = s.known / within if within > 0 else np.ones(len(s))
    group = combine(held)
    return Units(s.y, k, level, group, within, 30.0), group


def _conditions(
    where: Scene, how: Axis, s: Sample
) -> dict[tuple[str, ...], tuple[tuple[Condition, ...], IntArray, IntArray]]:
    """Return for each group the conditions new cells are measured at, and the rows behind."""
    recipes, rows = measured(where, s), where.rows(s)
    group = _coded(s, recipes, how.group)
    keys = sorted({how.group(recipe) for recipe in recipes.values()})
    chooser = _series if how.name == "barrier" else _stratum
    found = {}
    for code in np.unique(group):
        mine = np.flatnonzero(group == code)
        chosen = chooser(s, mine)
        conditions = tuple(condition_of(where.readings, rows[one].tolist()) for one in chosen)
        found[keys[int(code)]] = (conditions, rows[mine], rows[chosen[0]])
    return found


def _stratum(s: Sample, mine: IntArray) -> list[IntArray]:
    """Return the rows of the stratum with most electrolytes, then most cells, nearest 25 C."""
    code = combine(s.c.temperature[mine], s.state[mine])

    def rank(one: int) -> tuple[float, ...]:
        rows = mine[code == one]
        away = abs(float(s.c.temperature_K[rows].mean()) - 298.15)
        return (
            -len(np.unique(s.c.electrolyte[rows])), -len(np.unique(s.c.cell[rows])),
            round(away, 0), one,
        )  # fmt: skip

    best = min(range(int(code.max()) + 1), key=rank)
    return [mine[code == best]]


def _series(s: Sample, mine: IntArray) -> list[IntArray]:
    """Return the rows of each temperature that most cells were measured at, in one state."""
    state = Counter(s.state[mine].tolist()).most_common(1)[0][0]
    inside = mine[s.state[mine] == state]
    cells = len(np.unique(s.c.cell[inside]))
    chosen = []
    for code in np.unique(s.c.temperature[inside]):
        rows = inside[s.c.temperature[inside] == code]
        if 2 * len(np.unique(s.c.cell[rows])) >= cells:
            chosen.append(rows)
    return chosen or [inside]


def _slots(
    where: Scene, how: Axis, recipes: dict[int, Recipe], names: list[str],
    groups: dict[tuple[str, ...], int],
    conditions: dict[tuple[str, ...], tuple[tuple[Condition, ...], IntArray, IntArray]],
    new: bool,
) -> list[Slot]:  # fmt: skip
    """Return the cells that may be built: existing levels, and with `new` further recipes."""
    slots = []
    taken = set()
    for recipe in sorted(recipes.values(), key=lambda one: one.text):
        taken.add(recipe.text)
        slots += _slot(where, how, recipe, names, groups, conditions, known=True, fresh=False)
    if not new:
        return slots
    used = set(where.readings.electrolyte.tolist())
    for recipe in catalogue(where):
        if recipe.text not in taken and how.group(recipe) in groups:
            known = recipe.text in used
            slots += _slot(where, how, recipe, names, groups, conditions, known=known, fresh=True)
    return slots


def _further(
    where: Scene, how: Axis, names: list[str], groups: dict[tuple[str, ...], int]
) -> list[str]:
    """Return the levels with those concentrations of the campaign that are new to the axis.

    Further solvents or additives would only add comparisons that have to be decided as well.
    """
    if how.name != "concentration":
        return names
    found = list(names)
    for recipe in catalogue(where):
        if how.group(recipe) in groups and _named(how, recipe, found) is None:
            found.append(f"{recipe.concentration:.6g}")
    return found


def _slot(
    where: Scene, how: Axis, recipe: Recipe, names: list[str],
    groups: dict[tuple[str, ...], int],
    conditions: dict[tuple[str, ...], tuple[tuple[Condition, ...], IntArray, IntArray]],
    *, known: bool, fresh: bool,
) -> list[Slot]:  # fmt: skip
    """Return the slot of one recipe, none where its level or its conditions are not allowed."""
    key, level = how.group(recipe), _named(how, recipe, names)
    if level is None or key not in conditions:
        return []
    shared, rows, _ = conditions[key]
    own = _own(where, recipe, shared)
    if own is None or not all(where.limits.allows(recipe.text, one) for one in own):
        return []
    mine = [row for row in rows if where.readings.electrolyte[row] == recipe.text]
    cell = like(
        where.readings, mine or rows.tolist(), where.electrode, recipe.text, own, known
    )
    return [Slot(cell, level, groups[key], fresh)]


def _named(how: Axis, recipe: Recipe, names: list[str]) -> int | None:
    """Return the level of a recipe; None where it would be a level of its own."""
    text = how.level(recipe)
    if how.name != "concentration":
        return names.index(text) if text in names else None
    near = [abs(math.log(recipe.concentration / float(one))) for one in names]
    best = int(np.argmin(near))
    return best if near[best] <= concentration.SAME_LEVEL else None


def _own(
    where: Scene, recipe: Recipe, shared: tuple[Condition, ...]
) -> tuple[Condition, ...] | None:
    """Return the shared conditions as this recipe's own: its half-filling potential counts.

    None where the half-filling potential in this recipe would have to be guessed.
    """
    if not any(math.isfinite(one.E_half_V) for one in shared):
        return shared
    r = where.readings
    mine = (r.electrolyte == recipe.text) & (r.electrode == where.electrode)
    own = []
    for one in shared:
        halves = r.E_half_V[mine & (r.reference == one.reference)]
        halves = halves[np.isfinite(halves)]
        if not len(halves):
            return None
        half = round(float(np.median(halves)), 3)
        offset = one.potential_V - one.E_half_V
        own.append(replace(one, potential_V=round(half + offset, 3), E_half_V=half))
    return tuple(own)


def _repeated(slots: Sequence[Slot], units: Units) -> tuple[list[Slot], int]:
    """Return the slots with as many spectra a condition as the scatter of readings asks for."""
    if units.within <= 0 or len(units) < 3:
        return list(slots), 1
    spread = float(np.var(units.y - _group_means(units), ddof=0)) or units.within
    between_ = max(spread - units.within * float(units.k.mean()), 0.1 * spread)
    repeats = min(max(math.ceil(0.5 * units.within / between_), 1), MOST_REPEATS)
    return [replace(one, cell=replace(one.cell, repeats=repeats)) for one in slots], repeats


def _group_means(units: Units) -> FloatArray:
    code = combine(units.group, units.level)
    return np.asarray((np.bincount(code, units.y) / np.bincount(code))[code])


def _untested(where: Scene, how: Axis, finding: Finding, alpha: float) -> Layout:
    """Return the problem of an axis without contrast: a second level for one of its groups."""
    try:
        s = comparable(where.whole)
    except NoContrast as reason:
        raise Unplannable(str(reason)) from reason
    if s.open_because is not None:
        raise Unplannable(held_open(s.open_because))
    if how.name == "barrier":
        s = _with_temperatures(where, s)
    recipes = measured(where, s)
    chosen = _base_and_other(where, how, s, recipes)
    base, other = chosen
    group = how.group(base)
    mine = np.flatnonzero([how.group(recipes[int(e)]) == group for e in s.c.electrolyte])
    part = s.take(mine)
    names = sorted({how.level(base), how.level(other)}, key=_natural)
    rows_of_levels = [how.level(recipes[int(e)]) for e in part.c.electrolyte]
    kept = np.flatnonzero([one in names for one in rows_of_levels])
    part = part.take(kept)
    own = measured(where, part)
    level = np.array([names.index(how.level(own[int(e)])) for e in part.c.electrolyte], np.int64)
    zeros = np.zeros(len(part), np.int64)
    assumed: tuple[str, ...] = (where.pool_note,) if where.pool_note else ()
    if how.name == "barrier":
        units, pool, k_note = _first_barriers(where, part, level)
        where = replace(where, known=Known(pool))
        assumed = (k_note,) if k_note else ()
    else:
        stratum = combine(part.c.temperature, part.state)
        units, _ = cell_units(part, stratum, level, zeros)
        units = replace(units, group=np.zeros(len(units), np.int64))
    conditions = _conditions(where, how, part)
    if how.name == "barrier":
        conditions = {key: (_series_for(where, part, one[0]), *one[1:])
                      for key, one in conditions.items()}  # fmt: skip
    used = set(where.readings.electrolyte.tolist())
    slots = [
        slot
        for recipe in (base, other)
        for slot in _slot(where, how, recipe, names, {group: 0}, conditions,
                          known=recipe.text in used, fresh=recipe is other)
    ]  # fmt: skip
    if len({one.level for one in slots}) < 2:
        raise Unplannable("no second level lies inside the limits at equal conditions")
    return _built(where, how, finding, alpha, units, slots, names, 1, 1, assumed)


def _natural(text: str) -> tuple[float, str]:
    try:
        return float(text), ""
    except ValueError:
        return math.inf, text


def _base_and_other(
    where: Scene, how: Axis, s: Sample, recipes: dict[int, Recipe]
) -> tuple[Recipe, Recipe]:
    """Return the measured recipe to start from and the one that makes a second level of it.

    Recipes the electrode was measured in come first, then others of the campaign; among
    concentrations the one furthest away.
    """
    cells = {
        code: len(np.unique(s.c.cell[s.c.electrolyte == code])) for code in recipes
    }
    own = {recipe.text for recipe in recipes.values()}
    best: tuple[tuple[float, ...], Recipe, Recipe] | None = None
    for code, base in recipes.items():
        for other in (*recipes.values(), *catalogue(where)):
            if how.group(other) != how.group(base) or how.level(other) == how.level(base):
                continue
            if other.aqueous != base.aqueous:
                continue
            away = abs(math.log(other.concentration / base.concentration))
            rank = (float(other.text in own), cells[code], away)
            if best is None or rank > best[0]:
                best = (rank, base, other)
    if best is None:
        what = {"concentration": "salt concentration", "solvent": "solvent",
                "additive": "additive"}.get(how.name, "solvent")  # fmt: skip
        raise Unplannable(
            f"the campaign holds no electrolyte that differs in the {what} alone; record one with "
            "'campaign add electrolyte' and its temperature limits, and it can be proposed"
        )
    return best[1], best[2]


def _with_temperatures(where: Scene, s: Sample) -> Sample:
    if not len(s):
        raise Unplannable("no readings of this response")
    return s


def _series_for(
    where: Scene, s: Sample, conditions: tuple[Condition, ...]
) -> tuple[Condition, ...]:
    """Return a temperature series: the one in use, else the allowed range in equal steps."""
    if len(conditions) >= FEWEST_TEMPERATURES:
        return conditions
    recipes = {recipe.text for recipe in measured(where, s).values()}
    spans = [where.limits.temperatures(text) for text in recipes]
    low, high = max(one[0] for one in spans), min(one[1] for one in spans)
    if not (math.isfinite(low) and math.isfinite(high) and high - low >= 10.0):
        raise Unplannable(
            "no temperature limits are declared and too narrow a range was measured; declare "
            "the electrode's highest temperature and the electrolytes' limits"
        )
    values = np.linspace(low, high, FEWEST_TEMPERATURES)
    return tuple(replace(conditions[0], temperature_K=round(float(v), 1)) for v in values)


def _first_barriers(
    where: Scene, s: Sample, level: IntArray
) -> tuple[Units, Scatter | None, str]:
    """Return the barriers known so far of one level, and their scatter."""
    try:
        kept, inside = usable(s)
        found = barriers(kept, inside).by_specimen
        of = {int(a): int(b) for a, b in zip(s.c.specimen, level, strict=True)}
        its_level = np.array([of[int(one)] for one in found.c.specimen], np.int64)
        zeros = np.zeros(len(found), np.int64)
        units, _ = _barrier_units(found, zeros, its_level)
        code = np.unique(its_level, return_inverse=True)[1]
        rest = units.y - (np.bincount(code, units.y) / np.bincount(code))[code]
        df = float(len(units) - int(code.max()) - 1)
        if df >= 1:
            return units, Scatter(max(float(rest @ rest) / df, 1e-6), df), ""
    except NoContrast:
        units = Units(np.zeros(0), np.zeros(0), np.zeros(0, np.int64), np.zeros(0, np.int64))
    pool = where.scatter
    within = pool.within if pool is not None and pool.within > 0 else 0.05**2
    x = 1000.0 / (GAS_CONSTANT * np.array([278.15, 298.15, 318.15]))
    typical = within / float(((x - x.mean()) ** 2).sum()) + 1.5**2
    note = "the scatter of barriers between cells is not known yet: 1.5 kJ/mol is taken"
    return units, Scatter(typical, 3.0), note
