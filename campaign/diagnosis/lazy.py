"""Evidence that is worked out axis by axis, when it is first asked for.

A trial without one specimen needs the verdict's word alone, and that often hangs on two or
three axes: the others are never estimated.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping

from campaign.diagnosis.wording import Decider
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import Snapshot
from campaign.trends.findings import Axis


class LazyEvidence(Mapping[str, Decider]):
    """Findings by axis; `estimate` is called once for an axis, when it is looked up."""

    def __init__(self, axes: tuple[str, ...], estimate: Callable[[str], Decider]) -> None:
        self._axes = axes
        self._estimate = estimate
        self._found: dict[str, Decider] = {}

    def __getitem__(self, axis: str) -> Decider:
        if axis not in self._found:
            if axis not in self._axes:
                raise KeyError(axis)
            self._found[axis] = self._estimate(axis)
        return self._found[axis]

    def __iter__(self) -> Iterator[str]:
        return iter(self._axes)

    def __len__(self) -> int:
        return len(self._axes)

    def __contains__(self, axis: object) -> bool:
        return axis in self._axes


def trend_evidence(
    snapshot: Snapshot, criteria: Criteria, electrode: str, response: str
) -> Mapping[str, Decider]:
    """Return the findings of the trends on one response of one electrode, by axis.

    The same findings as trends.evidence.findings, each estimated when it is looked up.
    Raises Refused for an unknown response.
    """
    from campaign.trends import evidence
    from campaign.trends.sample import draw, source

    whole = draw(snapshot, source(snapshot, criteria, electrode), response)
    axes: Mapping[str, Axis] = {axis: axis for axis in evidence.AXES}
    return LazyEvidence(
        tuple(axes), lambda axis: evidence._finding(whole, criteria, axes[axis])
    )
