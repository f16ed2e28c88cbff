"""Is the state of the electrode held? Which readings are comparable, and by what.

Against a fixed reference the half-filling potential moves with the electrolyte (by
RT/F ln c with concentration): one potential is then not one ion content, which shifts an
order by up to +-0.5 and a barrier by several kJ/mol. Readings are therefore matched, in
this order, by recorded ion content; by E - E_half; by the potential against the same
ion's electrode in the same electrolyte; symmetric cells by being symmetric.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from campaign.ledger.readings import BoolArray, IntArray
from campaign.trends.conditions import Conditions

NOT_COMPARABLE = "potential not comparable"

_CONTENT, _OFFSET, _OWN, _SYMMETRIC, _FIXED = range(5)


@dataclass(frozen=True)
class State:
    """State of n readings: `code` [n] equal where the state is; `held` [n] comparable.

    lost: in a two-phase plateau, where a potential does not fix the ion content; such a
    reading is comparable only by its recorded ion content.
    """

    code: IntArray
    held: BoolArray
    lost: BoolArray

    @property
    def comparable(self) -> bool:
        """Return True where every reading's state is held."""
        return bool(self.held.all())


def state(c: Conditions) -> State:
    """Return the state of the readings `c`: one kind for all where one covers all."""
    kinds = [c.content, c.offset, c.own, np.where(c.symmetric, 0, -1)]
    loose = c.symmetric & (c.fixed < 0)
    for kind, codes in enumerate(kinds[:_SYMMETRIC]):
        if bool(((codes >= 0) | loose).all()) and bool((codes >= 0).any()):
            return _coded(c, [(kind, codes), (_SYMMETRIC, kinds[_SYMMETRIC])])
    return _coded(c, list(enumerate(kinds)))


def _coded(c: Conditions, kinds: list[tuple[int, IntArray]]) -> State:
    """Give each reading the first of `kinds` it has; without any, its fixed potential."""
    code = np.full(len(c), -1, np.int64)
    kind_of = np.full(len(c), _FIXED, np.int64)
    for kind, codes in reversed(kinds):
        has = codes >= 0
        code[has], kind_of[has] = codes[has], kind
    fixed = kind_of == _FIXED
    code[fixed] = c.fixed[fixed]
    by_potential = (kind_of != _CONTENT) & (kind_of != _SYMMETRIC)
    return State((code + 1) * (_FIXED + 1) + kind_of, ~fixed, c.plateau & by_potential)
