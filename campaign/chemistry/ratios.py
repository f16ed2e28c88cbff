"""Ratios as exact numbers, so that 1:1, 50:50 and 0.5:0.5 are one ratio."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from math import gcd, lcm

from campaign.chemistry.spelling import number_text

LARGEST_WHOLE = 1000


def normalised(parts: Sequence[Fraction], places: int) -> tuple[Fraction, ...] | None:
    """Return the parts as fractions of their sum, which sum to exactly 1.

    A ratio of whole numbers up to 1000 stays exact; another is put on a grid of 10^-places.
    None where a part is below the grid.
    """
    total = sum(parts)
    shares = tuple(part / total for part in parts)
    return shares if whole(shares) is not None else _on_grid(parts, places)


def _on_grid(parts: Sequence[Fraction], places: int) -> tuple[Fraction, ...] | None:
    """Return shares in steps of 10^-places that sum to 1: largest remainders are rounded up."""
    total, steps = sum(parts), 10**places
    exact = [part / total * steps for part in parts]
    counts = [int(share) for share in exact]
    by_remainder = sorted(range(len(parts)), key=lambda i: (counts[i] - exact[i], i))
    for i in by_remainder[: steps - sum(counts)]:
        counts[i] += 1
    return tuple(Fraction(count, steps) for count in counts) if min(counts) > 0 else None


def rounded(parts: Sequence[Fraction], places: int) -> tuple[Fraction, ...] | None:
    """Return the shares of the parts rounded to `places`, so that rounding again changes nothing.

    Thirds stay equal (0.333333 each); where plain rounding would not be stable, the largest
    remainders are rounded up. None where a share rounds to zero.
    """
    plain = _plain(parts, places)
    if min(plain) > 0 and _plain(plain, places) == plain:
        return plain
    return _on_grid(parts, places)


def _plain(parts: Sequence[Fraction], places: int) -> tuple[Fraction, ...]:
    total = sum(parts)
    return tuple(round(part / total, places) for part in parts)


def whole(shares: Sequence[Fraction]) -> tuple[int, ...] | None:
    """Return the smallest whole numbers in the ratio of `shares`; None if one exceeds 1000."""
    scale = lcm(*(share.denominator for share in shares))
    numbers = [int(share * scale) for share in shares]
    divisor = gcd(*numbers)
    smallest = tuple(number // divisor for number in numbers)
    return smallest if max(smallest) <= LARGEST_WHOLE else None


def ratio_text(shares: Sequence[Fraction]) -> str:
    """Return '3:7', or decimal fractions of one where no small whole numbers do."""
    numbers = whole(shares)
    if numbers is not None:
        return ":".join(str(number) for number in numbers)
    return ":".join(number_text(float(share)) for share in shares)
