"""What a product of symbols means in a column of a given kind, and the words when it means something else."""

from __future__ import annotations

import math
import re

from actuator_sizing.unit_kinds import GLUED, KINDS, PERCENT_LIKE, SYMBOLS, Dimension, Kind, Symbol
from actuator_sizing.unit_syntax import Product

_OF_ROTATION = ("angular speed", "angular acceleration", "angular jerk", "speed constant")
_NEVER_NAMED = ("lead", "ratio", "count", "price")  # kinds that a refusal does not propose


def lookup(name: str, kind: Kind, pound_is_force: bool) -> Symbol | None:
    """Meaning of one symbol in a column of this kind."""
    if name in ("'", '"'):
        arc = kind.dimension[5] != 0.0 and kind.dimension[1] == 0.0 or kind.name == "torsional stiffness"
        return SYMBOLS[{"'": "arcmin", '"': "arcsec"}[name] if arc else {"'": "ft", '"': "in"}[name]]
    if name == "g" and kind.name in ("linear acceleration", "linear jerk"):
        kgf, kg = SYMBOLS["kgf"], SYMBOLS["kg"]
        return Symbol(kgf.factor, tuple(a - b for a, b in zip(kgf.dimension, kg.dimension, strict=True)), "g")
    symbol = SYMBOLS.get(name)
    if symbol is not None and pound_is_force and symbol.base in ("lb", "oz") and not name.endswith("m"):
        return SYMBOLS[symbol.base + "f"]
    return symbol


def _combine(product: Product, kind: Kind, pound_is_force: bool) -> tuple[float, Dimension, frozenset[str]]:
    """Factor, dimension and base symbols; 1/min counts as turns where the kind wants an angle."""
    factor = product.number
    total = [0.0] * 6
    bases = set()
    minutes = 0.0
    for name, power in product.powers:
        symbol = lookup(name, kind, pound_is_force)
        assert symbol is not None  # unknown symbols were refused before
        factor *= symbol.factor**power
        total = [have + power * one for have, one in zip(total, symbol.dimension, strict=True)]
        bases.add(symbol.base)
        if symbol.base == "min":
            minutes += power
    if minutes and total[5] == 0.0 and kind.dimension[5] != 0.0:
        factor *= (2.0 * math.pi) ** -minutes
        total[5] -= minutes
    if kind.name == "lead" and total[5] == -1.0:
        factor *= 2.0 * math.pi  # per radian -> per turn
        total[5] = 0.0
    return factor, tuple(total), frozenset(bases)


def factor_of(product: Product, kind: Kind, pound_is_force: bool) -> float | None:
    """SI factor, or None if the product is not of this kind."""
    try:
        factor, dimension, bases = _combine(product, kind, pound_is_force)
    except OverflowError:
        return math.inf
    if bases & set(PERCENT_LIKE) and kind.name != "temperature coefficient":
        return None
    if (kind.needs and kind.needs not in bases) or bases & set(kind.refuses):
        return None
    if product.flywheel:
        return _flywheel(product.flywheel, factor, dimension) if kind.name == "inertia" else None
    without_angle = (*kind.dimension[:5], 0.0)
    if dimension == kind.dimension or (kind.radian_optional and dimension == without_angle):
        return factor
    return None


def _flywheel(name: str, factor: float, dimension: Dimension) -> float | None:
    """Moment of inertia from a flywheel effect: by weight GD² = 4 g J and WK² = g J; by mass without g."""
    divisor = 4.0 if name == "GD2" else 1.0
    if dimension == (1.0, 2.0, 0.0, 0.0, 0.0, 0.0):
        return factor / divisor
    if dimension == (1.0, 3.0, -2.0, 0.0, 0.0, 0.0):
        return factor / (divisor * SYMBOLS["kgf"].factor)
    return None


# -- words of a refusal -------------------------------------------------------------------------------------


def shown(text: str) -> str:
    """Quote what was typed, shortened."""
    text = " ".join(text.split())
    return f"'{text}'" if len(text) <= 40 else f"'{text[:40]}…'"


def with_article(kind_name: str) -> str:
    """Put a or an before the name of a kind."""
    return f"{'an' if kind_name[0] in 'aeiou' else 'a'} {kind_name}"


def accepted(kind: Kind) -> str:
    """List spellings of a kind."""
    return f"Accepted for {kind.name}: {', '.join(kind.examples)}."


def meant(name: str) -> str:
    """Nearest known symbol as a question, or nothing."""
    import difflib

    known = (*GLUED, *SYMBOLS)
    same_letters = [one for one in known if one.casefold() == name.casefold()]
    close = same_letters or difflib.get_close_matches(name[:20], known, n=1, cutoff=0.6)
    return f" Did you mean '{close[0]}'?" if close else ""


def mismatch(product: Product, kind: Kind, spelling: str) -> str:
    """Say what the spelling is, and what to write instead if that is clear."""
    text = f"{shown(spelling)} {_described(product, kind)}"
    names = {name for name, _ in product.powers}
    for mass, force in (("kg", "kgf"), ("g", "gf"), ("lbm", "lbf")):
        if mass in names and kind.pound_is_force is not False:
            powers = tuple((force if name == mass else name, power) for name, power in product.powers)
            if factor_of(Product(product.number, powers, ""), kind, True) is not None:
                instead = re.sub(rf"(?<![A-Za-z]){mass}", force, spelling, count=1)
                return f"{text}; for {kind.name} write {instead}."
    if kind.name == "inertia" and not product.flywheel and _is_weight_times_area(product, kind):
        return f"{text}; for a flywheel effect write GD² {spelling}."
    if kind.name in _OF_ROTATION and _per_second_alone(product, kind):
        return f"{text}; per second can mean turns or radians, write rev/s or rad/s. {accepted(kind)}"
    return f"{text}. {accepted(kind)}"


def _per_second_alone(product: Product, kind: Kind) -> bool:
    """Whether only the angle is missing, as in 1/s for a speed of rotation."""
    return _combine(product, kind, False)[1] == (*kind.dimension[:5], 0.0)


def _is_weight_times_area(product: Product, kind: Kind) -> bool:
    return _combine(product, kind, True)[1] == (1.0, 3.0, -2.0, 0.0, 0.0, 0.0)


def _described(product: Product, kind: Kind) -> str:
    if product.flywheel:
        return f"is a flywheel effect, not {with_article(kind.name)}"
    for other in KINDS.values():
        if other.name not in (kind.name, *_NEVER_NAMED):
            readings = (False, True) if other.pound_is_force is None else (other.pound_is_force,)
            if any(factor_of(product, other, reading) is not None for reading in readings):
                return f"is {with_article(other.name)}, not {with_article(kind.name)}"
    if len(product.powers) > 1:
        words = []
        for name, power in product.powers:
            symbol = lookup(name, kind, kind.pound_is_force is True)
            assert symbol is not None  # unknown symbols were refused before
            word = _word(symbol, kind)
            words.append(f"{'/' if power < 0 else '×'} {word}{'' if abs(power) == 1 else f'^{abs(power):g}'}")
        return f"is {' '.join(words).removeprefix('× ')}, not {with_article(kind.name)}"
    return f"is not {with_article(kind.name)}"


def _word(symbol: Symbol, kind: Kind) -> str:
    for other in KINDS.values():
        if other.dimension == symbol.dimension and other.name not in _NEVER_NAMED:
            return other.name
    return "number"
