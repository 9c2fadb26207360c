"""The kinds of quantity that a column can have, their SI units, and the symbols that headings are made of.

Read by `units`, which parses; kept apart so that adding a kind or a symbol is one line of a table here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

POUND_KG = 0.45359237  # international pound, exact by definition (1959)
INCH_M = 0.0254  # international inch, exact by definition (1959)
GRAVITY_M_S2 = 9.80665  # standard acceleration of gravity, CGPM 1901, exact by definition

Dimension = tuple[float, ...]  # exponents of kg, m, s, A, K, rad


def _dim(kg: float = 0, m: float = 0, s: float = 0, A: float = 0, K: float = 0, rad: float = 0) -> Dimension:
    return (float(kg), float(m), float(s), float(A), float(K), float(rad))


_ONE = _dim()
_MASS, _LENGTH, _TIME, _CURRENT, _KELVIN, _ANGLE = (
    _dim(kg=1),
    _dim(m=1),
    _dim(s=1),
    _dim(A=1),
    _dim(K=1),
    _dim(rad=1),
)
_FORCE = _dim(kg=1, m=1, s=-2)
_ENERGY = _dim(kg=1, m=2, s=-2)  # torque has the same dimension
_POWER = _dim(kg=1, m=2, s=-3)
_VOLTAGE = _dim(kg=1, m=2, s=-3, A=-1)
_RESISTANCE = _dim(kg=1, m=2, s=-3, A=-2)
_INDUCTANCE = _dim(kg=1, m=2, s=-2, A=-2)
_CAPACITANCE = _dim(kg=-1, m=-2, s=4, A=2)
_FREQUENCY = _dim(s=-1)
_PRESSURE = _dim(kg=1, m=-1, s=-2)


@dataclass(frozen=True)
class Kind:
    """One kind of quantity, e.g. torque.

    Attributes
    ----------
    name : str
        Key in `KINDS`.
    si_unit : str
        Label of the SI unit, ``"-"`` for a plain number.
    examples : tuple of str
        Spellings shown to a user whose unit was not understood.
    dimension : tuple of float
        Exponents of kg, m, s, A, K, rad. [-]
    radian_optional : bool
        The angle may be left out, as in V·s for V·s/rad.
    pound_is_force : bool or None
        What oz and lb mean: force, mass, or (None) whichever fits the dimension.
    needs : str
        Base symbol that must occur; tells N·m/A from V·s, which have the same dimension.
    refuses : tuple of str
        Base symbols that must not occur although the dimension fits.
    with_basis : bool
        rms, peak or DC may be stated.
    """

    name: str
    si_unit: str
    examples: tuple[str, ...]
    dimension: Dimension = _ONE
    radian_optional: bool = False
    pound_is_force: bool | None = False
    needs: str = ""
    refuses: tuple[str, ...] = ()
    with_basis: bool = False


def _kind(name: str, si_unit: str, examples: str, dimension: Dimension = _ONE, **options: object) -> Kind:
    return Kind(name, si_unit, tuple(examples.split(", ")), dimension, **options)  # type: ignore[arg-type]


KINDS: dict[str, Kind] = {
    kind.name: kind
    for kind in (
        _kind("torque", "N·m", "Nm, mNm, Ncm, oz-in, lb-in, lb-ft, kgf·cm, gf·cm", _ENERGY,
              pound_is_force=True, refuses=("J", "W", "V")),
        _kind("force", "N", "N, kN, kgf, lbf, ozf", _FORCE, pound_is_force=True),
        _kind("inertia", "kg·m²", "kg·m², kg·cm², g·cm², gcm2, oz-in-s², lb-in-s², lb-in², lb-ft², "
              "kgf·cm·s², GD² kgf·m²", _dim(kg=1, m=2), pound_is_force=None),
        _kind("mass", "kg", "kg, g, t, lb, oz", _MASS),
        _kind("length", "m", "m, cm, mm, µm, in, ft, mil", _LENGTH),
        _kind("lead", "m", "mm, mm/rev, in/rev, mm/U", _LENGTH),
        _kind("angle", "rad", "rad, °, deg, rev, arcmin, arcsec, gon", _ANGLE),
        _kind("angular speed", "rad/s", "rpm, 1/min, min⁻¹, r/min, U/min, rad/s, °/s, rev/s",
              _dim(rad=1, s=-1)),
        _kind("linear speed", "m/s", "m/s, mm/s, m/min, in/s, ft/min", _dim(m=1, s=-1)),
        _kind("angular acceleration", "rad/s²", "rad/s², °/s², rpm/s, rev/s²", _dim(rad=1, s=-2)),
        _kind("linear acceleration", "m/s²", "m/s², mm/s², g, in/s²", _dim(m=1, s=-2)),
        _kind("angular jerk", "rad/s³", "rad/s³, °/s³, rpm/s²", _dim(rad=1, s=-3)),
        _kind("linear jerk", "m/s³", "m/s³, mm/s³, g/s, in/s³", _dim(m=1, s=-3)),
        _kind("time", "s", "s, ms, µs, min, h", _TIME),
        _kind("resistance", "Ω", "Ω, mΩ, ohm, mohm, kΩ", _RESISTANCE),
        _kind("inductance", "H", "H, mH, µH, uH", _INDUCTANCE),
        _kind("capacitance", "F", "F, mF, µF, uF, nF", _CAPACITANCE),
        _kind("voltage", "V", "V, mV, kV, VDC, Vrms, Vpk", _VOLTAGE, with_basis=True),
        _kind("current", "A", "A, mA, Arms, Apk, A DC", _CURRENT, with_basis=True),
        _kind("power", "W", "W, kW, mW, hp, PS", _POWER, pound_is_force=True),
        _kind("energy", "J", "J, mJ, kJ, Ws, Wh, kWh, Nm", _ENERGY, pound_is_force=True),
        _kind("torque constant", "N·m/A", "Nm/A, mNm/A, Nm/Arms, Nm/Apk, Ncm/A, oz-in/A, lb-in/A, kgf·cm/A",
              _dim(kg=1, m=2, s=-2, A=-1), pound_is_force=True, needs="A", refuses=("V",), with_basis=True),
        _kind("force constant", "N/A", "N/A, N/Arms, N/Apk, lbf/A", _dim(kg=1, m=1, s=-2, A=-1),
              pound_is_force=True, needs="A", refuses=("V",), with_basis=True),
        _kind("back-EMF constant", "V·s/rad", "V/krpm, V/1000rpm, mV/rpm, Vrms/krpm, Vpk/krpm, "
              "V/(rad/s), mVs/rad",
              _dim(kg=1, m=2, s=-2, A=-1, rad=-1), radian_optional=True, needs="V", with_basis=True),
        _kind("linear back-EMF constant", "V·s/m", "V/(m/s), V·s/m, Vs/m, Vrms/(m/s), V/(in/s)",
              _dim(kg=1, m=1, s=-2, A=-1), needs="V", with_basis=True),
        _kind("speed constant", "rad/(s·V)", "rpm/V, 1/min/V, min⁻¹/V, rad/(s·V), rpm/Vrms, rpm/Vpk",
              _dim(kg=-1, m=-2, s=2, A=1, rad=1), needs="V", with_basis=True),
        _kind("motor constant", "N·m/√W", "N·m/√W, mNm/√W, Nm/sqrt(W), Nm/W^0.5, oz-in/√W",
              _dim(kg=0.5, m=1, s=-0.5), pound_is_force=True),
        _kind("thermal resistance", "K/W", "K/W, °C/W, C/W, K/kW", _dim(kg=-1, m=-2, s=3, K=1)),
        _kind("temperature", "°C", "°C, °F, K", _KELVIN),
        _kind("temperature coefficient", "1/K", "1/K, %/K, ppm/K, %/°C", _dim(K=-1)),
        _kind("ratio", "-", "%, -, 1"),
        _kind("rotary damping", "N·m·s/rad", "Nm·s/rad, Nms, mNm/krpm, Nm/krpm, Nm/(rad/s), "
              "oz-in/krpm, lb-in/krpm",
              _dim(kg=1, m=2, s=-1, rad=-1), radian_optional=True, pound_is_force=True),
        _kind("linear damping", "N·s/m", "N·s/m, N/(m/s), Ns/m, lbf/(in/s)", _dim(kg=1, s=-1),
              pound_is_force=True),
        _kind("torsional stiffness", "N·m/rad", "Nm/rad, Nm/arcmin, Nm/°, kNm/rad, lb-in/arcmin",
              _dim(kg=1, m=2, s=-2, rad=-1), pound_is_force=True),
        _kind("linear stiffness", "N/m", "N/m, N/mm, N/µm, kN/mm, lbf/in", _dim(kg=1, s=-2),
              pound_is_force=True),
        _kind("frequency", "Hz", "Hz, kHz, 1/s", _FREQUENCY),
        _kind("density", "kg/m³", "kg/m³, g/cm³, kg/dm³, lb/in³", _dim(kg=1, m=-3)),
        _kind("pressure", "Pa", "Pa, kPa, MPa, bar, N/mm², psi", _PRESSURE, pound_is_force=True),
        _kind("area", "m²", "m², cm², mm², in²", _dim(m=2)),
        _kind("pressure times speed", "W/m²", "MPa·m/s, N/mm²·m/s, bar·m/s, W/mm²", _dim(kg=1, s=-3),
              pound_is_force=True),
        _kind("volume", "m³", "m³, cm³, mm³, l, in³", _dim(m=3)),
        _kind("count", "-", "-, 1"),
        _kind("price", "", "EUR, USD, €, $"),
    )
}  # fmt: skip


@dataclass(frozen=True)
class Symbol:
    """One symbol: its size in SI, its dimension, and the base symbol it is a multiple of."""

    factor: float
    dimension: Dimension
    base: str


_PREFIXES = {"": 1.0, "p": 1e-12, "n": 1e-9, "μ": 1e-6, "u": 1e-6, "m": 1e-3, "c": 1e-2, "d": 1e-1,
             "h": 1e2, "k": 1e3, "M": 1e6}  # fmt: skip
# Base symbol, other names of it, prefixes met in the trade, dimension.
_PREFIXED: tuple[tuple[str, tuple[str, ...], str, Dimension], ...] = (
    ("m", (), " nμumcdk", _LENGTH),
    ("s", ("sec",), " nμum", _TIME),
    ("A", (), " nμumk", _CURRENT),
    ("V", (), " μumk", _VOLTAGE),
    ("W", (), " μumkM", _POWER),
    ("Ω", ("ohm", "Ohm", "ohms", "Ohms"), " μumkM", _RESISTANCE),
    ("H", (), " nμum", _INDUCTANCE),
    ("F", (), " pnμum", _CAPACITANCE),
    ("N", (), " μumcdkM", _FORCE),
    ("Pa", (), " hkM", _PRESSURE),
    ("bar", (), " m", _PRESSURE),
    ("J", (), " μumkM", _ENERGY),
    ("Wh", (), " k", _ENERGY),
    ("Hz", (), " kM", _FREQUENCY),
    ("rad", (), " μum", _ANGLE),
)
_BASE_FACTOR = {"bar": 1e5, "Wh": 3600.0}
_REVOLUTION = 2.0 * math.pi
_FOOT_M = 12.0 * INCH_M
# name(s), factor, dimension
_PLAIN: tuple[tuple[str, float, Dimension], ...] = (
    ("kg", 1.0, _MASS),
    ("g", 1e-3, _MASS),
    ("mg", 1e-6, _MASS),
    ("t", 1e3, _MASS),
    ("lb lbs lbm", POUND_KG, _MASS),
    ("oz ozm", POUND_KG / 16.0, _MASS),
    ("slug slugs", POUND_KG * GRAVITY_M_S2 / _FOOT_M, _MASS),
    ("lbf", POUND_KG * GRAVITY_M_S2, _FORCE),
    ("ozf", POUND_KG * GRAVITY_M_S2 / 16.0, _FORCE),
    ("kgf kp", GRAVITY_M_S2, _FORCE),
    ("gf", 1e-3 * GRAVITY_M_S2, _FORCE),
    ("in inch inches", INCH_M, _LENGTH),
    ("ft foot feet", _FOOT_M, _LENGTH),
    ("mil mils thou", 1e-3 * INCH_M, _LENGTH),
    ("min", 60.0, _TIME),
    ("h hr hrs hour hours", 3600.0, _TIME),
    ("rpm", _REVOLUTION / 60.0, _dim(rad=1, s=-1)),
    ("krpm", 1e3 * _REVOLUTION / 60.0, _dim(rad=1, s=-1)),
    ("rps", _REVOLUTION, _dim(rad=1, s=-1)),
    ("rev revs r U tr turn turns Umdr", _REVOLUTION, _ANGLE),
    ("deg degree degrees °", math.pi / 180.0, _ANGLE),
    ("arcmin", math.pi / 180.0 / 60.0, _ANGLE),
    ("arcsec", math.pi / 180.0 / 3600.0, _ANGLE),
    ("gon", math.pi / 200.0, _ANGLE),
    ("hp", 550.0 * POUND_KG * GRAVITY_M_S2 * _FOOT_M, _POWER),  # 550 ft·lbf/s by definition
    ("PS", 75.0 * GRAVITY_M_S2, _POWER),  # 75 kgf·m/s by definition
    ("psi", POUND_KG * GRAVITY_M_S2 / INCH_M**2, _PRESSURE),
    ("l L", 1e-3, _dim(m=3)),
    ("K °C degC C", 1.0, _KELVIN),  # differences; absolute temperatures are a kind of their own
    ("°F degF", 5.0 / 9.0, _KELVIN),
    ("%", 1e-2, _ONE),
    ("‰", 1e-3, _ONE),
    ("ppm", 1e-6, _ONE),
)


def _symbols() -> dict[str, Symbol]:
    table: dict[str, Symbol] = {}
    for base, others, prefixes, dimension in _PREFIXED:
        for prefix in prefixes.replace(" ", "\0"):
            prefix = prefix.strip("\0")
            symbol = Symbol(_PREFIXES[prefix] * _BASE_FACTOR.get(base, 1.0), dimension, base)
            for name in (base, *others):
                table[prefix + name] = symbol
    for names, factor, dimension in _PLAIN:
        first, *_ = names.split()
        for name in names.split():
            table[name] = Symbol(factor, dimension, first)
    return table


SYMBOLS = _symbols()

#: Spellings that hide a product. Closed: a free split would read Nms as newton-milliseconds.
GLUED: dict[str, tuple[str, ...]] = {
    "".join(parts): tuple(parts)
    for parts in (
        text.split()
        for text in (
            "N m,mN m,μN m,uN m,kN m,cN m,dN m,N cm,N mm,kN mm,N m s,mN m s,μN m s,N s,N m min,"
            "g cm,g mm,kg cm,kg mm,kg m,g m,t m,oz in,ozf in,lb in,lbf in,lb ft,lbf ft,in lb,in lbf,"
            "in oz,in ozf,ft lb,ft lbf,kgf cm,kgf m,gf cm,kp cm,kp m,kgf cm s,gf cm s,oz in s,lb in s,"
            "lb ft s,V s,mV s,W s,kW s,A s"
        ).split(",")
    )
}  # fmt: skip

#: Symbols written in any case; SI symbols keep theirs, because m and M differ by 10⁹.
ANY_CASE = frozenset(
    "rpm krpm oz ozf lb lbs lbf in inch inches ft foot feet hp psi mil deg arcmin arcsec rev revs kg kgf "
    "sec ppm bar gon slug turn turns".split()
)
PERCENT_LIKE = ("%", "‰", "ppm")
