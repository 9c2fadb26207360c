"""Text that users typed, made fit for a page without losing what it says."""

from __future__ import annotations

import unicodedata
from typing import Any

# A cell longer than this would push everything else off the page; the tables of the workbook keep it whole.
LONGEST = 160
_REPLACEMENT = "\N{REPLACEMENT CHARACTER}"
_ISOLATE, _END = "\N{FIRST STRONG ISOLATE}", "\N{POP DIRECTIONAL ISOLATE}"


def clean(text: Any, longest: int = LONGEST) -> str:
    r"""Make text safe to print: no control characters, no direction overrides, one line, bounded length.

    Parameters
    ----------
    text : object
        Anything; None is an empty text.
    longest : int
        Letters kept; a longer text ends with how long it was. [-]

    Examples
    --------
    >>> clean("two\nlines"), clean("abcdef" * 100, longest=6), clean(None)
    ('two lines', 'abcdef… (600 characters)', '')
    """
    if text is None:
        return ""
    line = " ".join("".join(map(_printable, str(text))).split())
    if len(line) > longest:
        line = f"{line[:longest]}… ({len(line)} characters)"
    if any(unicodedata.bidirectional(letter) in ("R", "AL") for letter in line):
        return f"{_ISOLATE}{line}{_END}"  # keeps right-to-left names from turning the sentence around them
    return line


def _printable(letter: str) -> str:
    category = unicodedata.category(letter)
    if letter in "\n\r\t\v\f\x85\u2028\u2029":
        return " "
    return _REPLACEMENT if category in ("Cc", "Cs") or letter in "\u202a\u202b\u202c\u202d\u202e" else letter


def option(case: Any, name: str, default: str = "") -> str:
    """Read a free-text row of the `axis` table, e.g. ``"prepared by"``; `default` when it is missing."""
    value = case.options.get(name, case.options.get(name.replace(" ", "_")))
    return clean(value) if value not in (None, "") else default


def check_name(key: str) -> str:
    """Spell a check's key for people who do not have its title.

    Examples
    --------
    >>> check_name("drive_peak_current")
    'drive peak current'
    """
    return key.replace("_", " ")


def in_sentence(title: str) -> str:
    """Write a title as it stands inside a sentence; abbreviations keep their capitals.

    Examples
    --------
    >>> in_sentence("Winding temperature"), in_sentence("RMS current")
    ('winding temperature', 'RMS current')
    """
    return title[:1].lower() + title[1:] if title[1:2].islower() else title


def plural(count: int, noun: str) -> str:
    """Write a count with its noun.

    Examples
    --------
    >>> plural(1, "set"), plural(12000, "set")
    ('1 set', '12\u202f000 sets')
    """
    return f"{count:,} {noun}{'' if count == 1 else 's'}".replace(",", "\N{NARROW NO-BREAK SPACE}")


#: Where the energy of a cycle goes, in the order of the way from the supply to the load: key and words.
ENERGY_PARTS = (
    ("supply", "from the supply"),
    ("steady", "stand-by and other loads"),
    ("resistor", "brake resistor"),
    ("drive", "drive"),
    ("cable", "motor cable"),
    ("winding", "winding (copper)"),
    ("motor_friction", "motor friction and iron"),
    ("gearhead", "gearhead"),
    ("mechanism", "mechanism and guides"),
    ("work", "work on process and payload"),
)
