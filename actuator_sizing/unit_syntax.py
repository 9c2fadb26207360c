"""Syntax of a unit's spelling: characters folded, rms and peak split off, a product of powers read.

Knows nothing of quantities except for the few spellings whose grouping depends on the kind of the column.
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from typing import NamedTuple

from actuator_sizing.unit_kinds import ANY_CASE, GLUED, SYMBOLS

LONGEST = 60  # characters; the longest spelling in use has about 30
_LARGEST_POWER = 4.0
_LARGEST_POWER_OF_TEN = 24


class SpellingError(Exception):
    """The spelling cannot be read; the text is one sentence for the user."""


@dataclass(frozen=True)
class Product:
    """A number times powers of symbols; `flywheel` is ``"GD2"`` or ``"WK2"`` where that word stood beside."""

    number: float
    powers: tuple[tuple[str, float], ...]
    flywheel: str = ""


# -- characters ---------------------------------------------------------------------------------------------

_FOLD = {
    **dict.fromkeys("·⋅•∙×∗", "*"),
    **dict.fromkeys("‐‑‒–—−", "-"),
    **dict.fromkeys("÷∕⁄", "/"),
    **dict.fromkeys("″”“", '"'),
    **dict.fromkeys("′’‘", "'"),
    **dict.fromkeys("º˚", "°"),
    "½": "0.5",
}
_BEFORE = str.maketrans(_FOLD)
_AFTER = str.maketrans({**_FOLD, "µ": "μ"})


def fold_characters(text: str) -> str:
    """Write the same spelling with one character per meaning; superscripts become digits, blanks single.

    Examples
    --------
    >>> fold_characters("kg·cm²"), fold_characters("min⁻¹")
    ('kg*cm2', 'min-1')
    """
    text = unicodedata.normalize("NFKC", text.replace("**", "^").translate(_BEFORE)).translate(_AFTER)
    text = re.sub(r"\b(in|ft|oz|lbs?|sec|min|rev|hr)\.(?![A-Za-z0-9])", r"\1", text)
    text = re.sub(r"(?<=[A-Za-zμΩ0-9])\.(?=[A-Za-zμΩ])", "*", text)
    return " ".join(text.split())


# -- rms, peak, DC ------------------------------------------------------------------------------------------

_MARKS = {
    "rms": "rms", "eff": "rms", "ac": "rms", "peak": "peak", "pk": "peak", "p": "peak", "max": "peak",
    "dc": "DC",
    "line-to-line": "line-to-line", "line to line": "line-to-line", "line-line": "line-to-line",
    "l-l": "line-to-line", "ll": "line-to-line", "line": "line-to-line",
    "phase": "phase", "ph": "phase", "l-n": "phase", "ln": "phase",
}  # fmt: skip
_MARK = "|".join(sorted(map(re.escape, _MARKS), key=len, reverse=True))
# Patterns stay text: `re` compiles them at first use, so that a start of the program does not pay for them.
_AFTER_SYMBOL = rf"(?i)(?<![A-Za-zμ])([kmμu]?[AV])((?:[\s_,]?[\s(]?(?:{_MARK})\)?)+)(?![A-Za-zμ0-9])"
_AT_END = rf"(?i)(?<=[^A-Za-zμ*/^-])[(,]?\s?((?:{_MARK})(?:[\s,]+(?:{_MARK}))*)\)?$"


def split_basis(text: str) -> tuple[str, str]:
    """Take the marks rms, peak, DC, line-to-line and phase out of a folded spelling.

    Examples
    --------
    >>> split_basis("Nm/Arms"), split_basis("V/krpm (rms, L-L)")
    (('Nm/A', 'rms'), ('V/krpm', 'rms line-to-line'))
    """
    marks: list[str] = []

    def keep_symbol(match: re.Match[str]) -> str:
        if match[1][-1] in "av":  # only the marks may be in any case, not the symbol
            return match[0]
        marks.extend(_MARKS[one] for one in re.findall(_MARK, match[2].lower()))
        return match[1]

    text = re.sub(_AFTER_SYMBOL, keep_symbol, text)
    at_end = re.search(_AT_END, text)
    if at_end:
        marks.extend(_MARKS[one] for one in re.findall(_MARK, at_end[1].lower()))
        text = text[: at_end.start()].rstrip(" ,")
    sizes = sorted({mark for mark in marks if mark in ("rms", "peak", "DC")})
    places = sorted({mark for mark in marks if mark in ("line-to-line", "phase")})
    if len(sizes) > 1 or len(places) > 1:
        raise SpellingError(f"{' and '.join(sizes if len(sizes) > 1 else places)} contradict each other.")
    return text, " ".join(sizes + places)


# -- products -----------------------------------------------------------------------------------------------


class _Token(NamedTuple):
    text: str
    sort: str  # number, symbol or sign
    adjacent: bool  # no blank before


_TOKEN = (
    r"(?P<blank> ?)(?:(?P<number>[0-9]+(?:\.[0-9]+)?(?:e[+-]?[0-9]{1,3}(?![A-Za-z0-9]))?)"
    r"|(?P<symbol>° ?[CF](?![A-Za-z])|[A-Za-zμΩ]+|[°%‰'\"])|(?P<sign>[()/*^√+-]))"
)
_FLYWHEEL = r"[(\s]*\b(GD|WK|WR)\^?2\b[)\s]*"
_LEADING_TIMES_TEN = r"^[x*] ?(?=10)"
_GLUED_POWER_OF_TEN = r"(?<=[A-Za-z]2)\s?e([+-]?[0-9]{1,2})$"
_PER_RADIAN_PER_SECOND = r"/ ?rad ?/ ?s(?:ec)?$"


def read_product(text: str, kind: str) -> Product:
    """Read a folded spelling without basis marks as a product of powers.

    Raises
    ------
    SpellingError
        If it is not one.

    Notes
    -----
    Operators of equal rank bind from the left, as in ISO 80000-1; a number binds to the symbol behind it, so
    that V/1000 rpm is V/(1000 rpm). V/rad/s and Nm/rad/s, which the trade writes for V/(rad/s), are
    understood where the kind leaves no other meaning.

    Examples
    --------
    >>> read_product("kg*cm2", "inertia").powers
    (('kg', 1.0), ('cm', 2.0))
    """
    flywheel = ""
    found = re.search(_FLYWHEEL, text)
    if found:
        flywheel = "GD2" if found[1] == "GD" else "WK2"
        text = (text[: found.start()] + " " + text[found.end() :]).strip(" ,")
    text = re.sub(_LEADING_TIMES_TEN, "", text)
    text = re.sub(_GLUED_POWER_OF_TEN, r" * 10^\1", text)
    if kind in ("back-EMF constant", "rotary damping"):
        text = re.sub(_PER_RADIAN_PER_SECOND, "/(rad/s)", text)
    reader = _Reader(_tokens(text))
    number, powers = reader.product(top=True)
    return Product(number, tuple(powers), flywheel)


def _tokens(text: str) -> list[_Token]:
    tokens, position = [], 0
    token = re.compile(_TOKEN)
    while position < len(text):
        match = token.match(text, position)
        if match is None:
            raise SpellingError(f"'{text[position]}' is not part of a unit.")
        sort = match.lastgroup or ""
        tokens.append(_Token(match[sort].replace(" ", ""), sort, not match["blank"]))
        position = match.end()
    if not tokens:
        raise SpellingError("there is no unit in it.")
    return tokens


class _Reader:
    """Recursive descent over the tokens; depth is bounded by the length of a spelling."""

    def __init__(self, tokens: list[_Token]):
        self.tokens = tokens
        self.at = 0

    def peek(self, ahead: int = 0) -> _Token:
        at = self.at + ahead
        return self.tokens[at] if at < len(self.tokens) else _Token("", "end", False)

    def product(self, top: bool = False) -> tuple[float, list[tuple[str, float]]]:
        number, powers = 1.0, []
        sign = 1.0
        if self.peek().text == "/":  # "/min" for 1/min
            self.at += 1
            sign = -1.0
        while True:
            factor, parts = self.factor()
            number *= factor**sign
            powers += [(name, power * sign) for name, power in parts]
            token = self.peek()
            if token.sort == "end" or token.text == ")":
                if top and token.text == ")":
                    raise SpellingError("')' has no '('.")
                return number, powers
            sign = 1.0
            if token.text in ("*", "/", "-"):
                sign = -1.0 if token.text == "/" else 1.0
                self.at += 1
            elif token.sort == "sign" and token.text not in ("(", "√"):
                raise SpellingError(f"'{token.text}' is out of place.")

    def factor(self) -> tuple[float, list[tuple[str, float]]]:
        token = self.peek()
        self.at += 1
        if token.sort == "end":
            raise SpellingError("something is missing at the end.")
        if token.sort == "number":
            return self.number(token)
        if token.text == "(":
            number, powers = self.product()
            if self.peek().text != ")":
                raise SpellingError("'(' is not closed.")
            self.at += 1
            power = self.power()
            return number**power, [(name, one * power) for name, one in powers]
        if token.text == "√" or token.text == "sqrt":
            number, powers = self.factor()
            return number**0.5, [(name, 0.5 * power) for name, power in powers]
        if token.sort != "symbol":
            raise SpellingError(f"'{token.text}' is out of place.")
        names = _expand(token.text)
        power = self.power()
        return 1.0, [(name, 1.0) for name in names[:-1]] + [(names[-1], power)]

    def number(self, token: _Token) -> tuple[float, list[tuple[str, float]]]:
        value = float(token.text)
        if value == 10.0:
            value = 10.0 ** self.power(_LARGEST_POWER_OF_TEN)
        if not 0.0 < value < 1e24:
            raise SpellingError(f"'{token.text}' is not a factor of a unit.")
        following = self.peek()
        if following.sort == "symbol" or following.text in ("(", "√"):
            factor, powers = self.factor()
            return value * factor, powers
        if following.sort == "number":
            raise SpellingError("two numbers stand side by side.")
        return value, []

    def power(self, largest: float = _LARGEST_POWER) -> float:
        """Exponent that follows: ^2, ^-1, ^(1/2), ^0.5, or 2 and -1 directly attached; 1 if there is none."""
        token, then = self.peek(), self.peek(1)
        value = None
        if token.text == "^":
            self.at += 1
            value = self.exponent()
        elif token.sort == "number" and token.adjacent:
            self.at += 1
            value = float(token.text)
        elif token.text == "-" and token.adjacent and then.sort == "number" and then.adjacent:
            self.at += 2
            value = -float(then.text)
        if value is None:
            return 1.0
        if not 0.0 < abs(value) <= largest:
            raise SpellingError(f"an exponent of {value:g} is out of range.")
        return value

    def exponent(self) -> float:
        bracket = self.peek().text == "("
        self.at += bracket
        sign = 1.0
        if self.peek().text in ("-", "+"):
            sign = -1.0 if self.peek().text == "-" else 1.0
            self.at += 1
        if self.peek().sort != "number":
            raise SpellingError("'^' needs a number.")
        value = sign * float(self.peek().text)
        self.at += 1
        below = self.peek(1)
        if bracket and self.peek().text == "/" and below.sort == "number" and float(below.text) > 0.0:
            value /= float(below.text)
            self.at += 2
        if bracket:
            if self.peek().text != ")":
                raise SpellingError("'(' is not closed.")
            self.at += 1
        return value


def _expand(name: str) -> tuple[str, ...]:
    """Known symbol, or the product that a glued spelling stands for; an unknown name is returned as it is."""
    for spelling in (name, name.lower()):
        if spelling in SYMBOLS and (spelling == name or spelling in ANY_CASE):
            return (spelling,)
        if spelling in GLUED and (spelling == name or all(part in ANY_CASE for part in GLUED[spelling])):
            return GLUED[spelling]
    return (name,)
