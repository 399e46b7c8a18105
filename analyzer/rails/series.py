"""Preferred numbers: is a resistance one that is made? IEC 60063:2015.

E24 is a table of its own (eight of its values are not the rounded powers), E96 and E192 are powers of ten in equal
steps rounded to three digits, with one exception: E192 has 9.20 where the power rounds to 9.19 (from memory).
"""

from __future__ import annotations

import math

E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)
E192 = tuple(920 if step == 185 else round(100 * 10 ** (step / 192)) for step in range(192))
E96 = E192[::2]
_MADE = frozenset({*(value * 10 for value in E24), *E192})


def is_preferred(value: float) -> bool:
    """Whether a value is in E24, E96 or E192, in any decade; zero counts as made."""
    if value <= 0:
        return value == 0
    decade = math.floor(math.log10(value) + 1e-9)
    digits = value / 10**decade * 100
    nearest = round(digits)
    return abs(digits - nearest) < 1e-6 * digits and (nearest in _MADE or nearest == 1000)
