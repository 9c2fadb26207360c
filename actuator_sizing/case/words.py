"""Allowed words and the spellings that mean the same."""

from __future__ import annotations

import re
from collections.abc import Sequence

from actuator_sizing.case.columns import fold

#: Folded spelling -> folded word; only where the trade means exactly the same.
_SAME = {
    "y": "yes", "true": "yes", "1": "yes", "x": "yes",
    "n": "no", "false": "no", "0": "no",
    "a rms": "rms", "arms": "rms", "a peak": "peak", "apk": "peak", "a pk": "peak", "pk": "peak",
    "a dc": "dc", "adc": "dc",
    "block": "six step", "block commutation": "six step", "3 4 5": "3 4 5 polynomial",
    "4 5 6 7": "4 5 6 7 polynomial", "triangle": "triangular", "jerk limited trapezoid": "jerk limited",
    "trapezoidal": "trapezoid",
    "sine": "sinusoidal", "brush": "brushed",
    "v dc": "dc", "vdc": "dc",
    "rms ll": "rms line to line", "peak ll": "peak line to line", "rms l l": "rms line to line",
    "peak l l": "peak line to line",
    "speed torque": "peak torque over speed", "drive bus voltage": "drive bus voltage range",
    "gearhead mean speed": "gearhead mean input speed",
    "gearhead maximum speed": "gearhead maximum input speed",
    "neodymium": "ndfeb", "samarium cobalt": "smco", "ferrit": "ferrite",
}  # fmt: skip


def canonical_word(text: str, words: Sequence[str]) -> str | None:
    """Find the allowed word that `text` means, harmless spelling variants accepted; None if it means none.

    Examples
    --------
    >>> canonical_word("Six step", ("brushed", "six-step")), canonical_word("RMS", ("DC", "rms"))
    ('six-step', 'rms')
    """
    folded = fold(text)
    by_fold = {fold(word): word for word in words}
    found = by_fold.get(folded)
    if found is None and folded in _SAME:
        found = by_fold.get(_SAME[folded])
    return found


def canonical_words(text: str, words: Sequence[str]) -> str | None:
    """Find the allowed words of a list, joined by comma; None if any part of it is not allowed.

    Commas, slashes, semicolons, plus signs and "and" separate.

    Examples
    --------
    >>> canonical_words("six-step / Brushed", ("brushed", "six-step"))
    'brushed, six-step'
    """
    parts = [part for part in re.split(r"[,/;+&]|\band\b", text) if part.strip()]
    found = {canonical_word(part, words) for part in parts}
    if None in found or not found:
        return None
    return ", ".join(word for word in words if word in found)
