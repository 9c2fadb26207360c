"""Write the demo catalogues: ``python catalogs_demo/make_catalogs.py`` regenerates `catalog/*.csv`.

Invented parts for an automated plant nursery (tray lift, tray shuttle, potting table, peat press, roof-vent arm,
shade winch, fan), computed from the laws in `scaling`. A name is the way of commutation or the sort of part, the
frame in mm with a letter for its length (s, m, l), and the bus voltage with f or s for a fast or slow winding.
Some optional cells stay empty on purpose, as in real sheets: what needs them comes out as "not checked".
"""

from __future__ import annotations

import csv
import io
import math
from pathlib import Path

from scaling import BRUSHED, SINUSOIDAL, SIX_STEP, Feeder, Frame, Gear, LinearUnit, Winding

SOURCE = "made up, scaling laws"
FAST, SLOW = 0.8, 0.48
Cell = float | str | None
Row = dict[str, Cell]

# frame diameter in mm, length over diameter, windings as (suffix, bus, design speed share)
_LOW = (("24", 24.0, FAST), ("48", 48.0, FAST))
_48 = (("48f", 48.0, FAST), ("48s", 48.0, SLOW))
_MAINS = (("325f", 325.0, FAST), ("325s", 325.0, SLOW))
_BRUSHED = ((25, "", 1.0, _LOW), (32, "", 1.0, _LOW), (40, "", 1.0, _LOW), (52, "", 0.9, _LOW),
            (65, "", 0.9, _48), (80, "", 0.9, _48))  # fmt: skip
_SIX_STEP = ((32, "", 0.9, (_LOW[0], *_48)), (42, "", 0.9, (_LOW[0], *_48)), (57, "", 0.9, (_LOW[0], *_48)),
             (70, "", 0.9, _48), (86, "", 0.9, _48))  # fmt: skip
_325 = (("325", 325.0, FAST),)
_565 = (("565f", 565.0, FAST), ("565s", 565.0, SLOW))
_SINUSOIDAL = (
    (40, "m", 0.8, (*_48, *_325)),
    (60, "s", 0.5, (*_48, *_325)), (60, "m", 0.8, (*_48, *_MAINS)),
    (80, "s", 0.5, (_48[0], *_MAINS, _565[0])), (80, "m", 0.8, (_48[0], *_MAINS, _565[0])),
    (100, "s", 0.5, (*_MAINS, *_565)), (100, "m", 0.75, (*_MAINS, *_565)),
    (130, "s", 0.45, (*_MAINS, *_565)), (130, "m", 0.65, (*_MAINS, *_565)), (130, "l", 0.9, (*_MAINS, *_565)),
    (180, "s", 0.45, (*_325, *_565)),
)  # fmt: skip
_LINEAR = ((0.040, 0.10, "48", 48.0, 1.5), (0.060, 0.16, "325", 325.0, 4.0), (0.060, 0.32, "325", 325.0, 4.0),
           (0.090, 0.24, "565", 565.0, 4.0), (0.090, 0.48, "565", 565.0, 4.0))  # fmt: skip

MOTOR_HEADINGS = (
    "motor", "commutation", "current basis", "nominal voltage [V]",
    "resistance terminal-to-terminal [mΩ]", "resistance temperature [°C]",
    "inductance terminal-to-terminal [mH]", "torque constant [mNm/A]", "back-EMF constant [V/krpm]",
    "back-EMF constant basis", "speed constant [rpm/V]", "force constant [N/A]", "pole pairs",
    "pole pitch [mm]", "rotor inertia [kg·cm²]", "moving mass [kg]", "friction torque [mNm]",
    "viscous friction [mNm/krpm]", "no-load current [A]", "no-load speed [min⁻¹]",
    "continuous current [A]", "continuous-rating ambient [°C]", "peak current [A]", "peak torque [Nm]",
    "maximum speed [min⁻¹]", "maximum linear speed [m/s]", "winding temperature limit [°C]",
    "thermal class", "thermal resistance winding-housing [K/W]",
    "thermal resistance housing-ambient [K/W]", "winding time constant [s]",
    "housing time constant [min]", "magnet material", "brake torque [Nm]", "brake inertia [kg·cm²]",
    "brake closing time [ms]", "brake energy per stop [J]", "mass [kg]", "price [EUR]", "source",
)  # fmt: skip
GEARHEAD_HEADINGS = (
    "gearhead", "ratio", "stages", "continuous torque [Nm]", "peak torque [Nm]", "emergency-stop torque [Nm]",
    "mean input speed [min⁻¹]", "maximum input speed [min⁻¹]", "efficiency [%]", "no-load running torque [Ncm]",
    "inertia at input [kg·cm²]", "torsional stiffness [Nm/arcmin]", "backlash [arcmin]", "mass [kg]", "price [EUR]",
    "source",
)  # fmt: skip
DRIVE_HEADINGS = (
    "drive", "current basis", "commutation", "continuous current [A]", "peak current [A]",
    "peak time [s]", "continuous-rating ambient [°C]", "ambient derating [%/K]",
    "altitude derating per 100 m [%]", "maximum output frequency [Hz]", "PWM frequency [kHz]",
    "minimum load inductance [µH]", "minimum bus voltage [V]",
    "maximum bus voltage [V]", "internal capacitance [µF]", "chopper threshold [V]", "chopper hysteresis [V]",
    "minimum brake resistor [Ω]", "efficiency [%]", "stand-by power [W]", "control rate [kHz]", "mass [kg]",
    "price [EUR]", "source",
)  # fmt: skip


def motors() -> list[Row]:
    """Every motor as a row keyed by heading."""
    rows = []
    for kind, prefix, frames in (
        (BRUSHED, "brush", _BRUSHED),
        (SIX_STEP, "block", _SIX_STEP),
        (SINUSOIDAL, "sine", _SINUSOIDAL),
    ):
        for diameter, letter, slenderness, windings in frames:
            frame = Frame(kind, diameter / 1000.0, slenderness * diameter / 1000.0)
            for suffix, bus_v, share in windings:
                basis = (
                    "DC"
                    if kind is not SINUSOIDAL
                    else "peak"
                    if (diameter, suffix) == (100, "565s")
                    else "rms"
                )
                rows.append(
                    _rotary(f"{prefix}-{diameter}{letter}-{suffix}", Winding(frame, basis, bus_v, share))
                )
    rows += [_linear(*size) for size in _LINEAR]
    _leave_empty(
        rows, 9, 4, "thermal resistance winding-housing [K/W]", "thermal resistance housing-ambient [K/W]"
    )
    _leave_empty(rows, 13, 7, "winding time constant [s]", "housing time constant [min]")
    return rows


def _rotary(name: str, winding: Winding) -> Row:
    frame, kind = winding.frame, winding.frame.kind
    row: Row = {
        "motor": name,
        "commutation": kind.commutation,
        "current basis": winding.basis,
        "nominal voltage [V]": winding.bus_v,
        "resistance terminal-to-terminal [mΩ]": 1e3 * winding.terminal_resistance,
        "resistance temperature [°C]": 25.0,
        "inductance terminal-to-terminal [mH]": 1e3 * winding.terminal_inductance,
        "rotor inertia [kg·cm²]": 1e4 * frame.inertia,
        "friction torque [mNm]": 1e3 * frame.friction_torque,
        "viscous friction [mNm/krpm]": 1e6 * frame.damping * math.pi / 30.0,
        "continuous current [A]": winding.continuous_current,
        "continuous-rating ambient [°C]": kind.rating_ambient_degc,
        "peak current [A]": winding.peak_current,
        "maximum speed [min⁻¹]": _round(frame.speed_max_rpm, 50.0),
        "thermal resistance winding-housing [K/W]": frame.winding_to_housing,
        "thermal resistance housing-ambient [K/W]": frame.housing_to_air,
        "winding time constant [s]": frame.winding_time_s,
        "housing time constant [min]": frame.housing_time_s / 60.0,
        "mass [kg]": frame.mass,
        "price [EUR]": _round(frame.price, 1.0),
        "source": SOURCE,
    }
    K = winding.torque_constant
    if kind is BRUSHED:
        _brushed(row, winding, K)
    elif kind is SIX_STEP:
        row["speed constant [rpm/V]"] = 30.0 / math.pi / K
        row |= {"pole pairs": 4.0, "thermal class": "F", "magnet material": "NdFeB"}
    else:
        row |= {
            "pole pairs": 5.0,
            "thermal class": "F",
            "magnet material": "NdFeB",
            "peak torque [Nm]": winding.peak_torque,
        }
        _sinusoidal_constant(row, winding, K)
        if frame.diameter_m >= 0.080 and winding.bus_v > 100.0:
            row["brake torque [Nm]"] = 1.3 * K * winding.continuous_current
            row["brake inertia [kg·cm²]"] = 1e4 * 0.08 * frame.inertia
            row["brake closing time [ms]"] = 20.0 + 250.0 * frame.diameter_m
            row["brake energy per stop [J]"] = 1.2e6 * frame.diameter_m**3
            row["price [EUR]"] = _round(frame.price * 1.12 + 30.0, 1.0)
    return row


def _brushed(row: Row, winding: Winding, K: float) -> None:
    """Torque constant and winding limit stated; the larger ones state a no-load point instead of friction."""
    row["torque constant [mNm/A]"] = 1e3 * K
    row["winding temperature limit [°C]"] = winding.frame.kind.winding_limit_degc
    row["magnet material"] = "ferrite" if winding.frame.diameter_m < 0.060 else "NdFeB"
    if winding.frame.diameter_m > 0.045:
        # c ω0 + T_c = K I0 and U = R I0 + K ω0 at the no-load speed ω0
        c, T_c, R = winding.frame.damping, winding.frame.friction_torque, winding.model_resistance
        speed = (winding.bus_v * K - R * T_c) / (K * K + R * c)
        row["no-load speed [min⁻¹]"] = speed * 30.0 / math.pi
        row["no-load current [A]"] = (T_c + c * speed) / K
        row["friction torque [mNm]"] = None


def _sinusoidal_constant(row: Row, winding: Winding, K: float) -> None:
    """Mains windings state the torque constant, the 565 V ones V rms line-to-line per 1000 rpm."""
    if winding.bus_v < 500.0 or winding.basis == "peak":
        row["torque constant [mNm/A]"] = 1e3 * K
    else:
        row["back-EMF constant basis"] = "rms line-to-line"
        row["back-EMF constant [V/krpm]"] = K / math.sqrt(3.0) * 1000.0 * math.pi / 30.0


def _linear(width_m: float, length_m: float, suffix: str, bus_v: float, speed_m_s: float) -> Row:
    unit = LinearUnit(width_m, length_m, bus_v, speed_m_s)
    first, second = unit.thermal_resistances
    return {
        "motor": f"coil-{1000 * width_m:.0f}x{1000 * length_m:.0f}-{suffix}",
        "commutation": "sinusoidal",
        "current basis": "rms",
        "nominal voltage [V]": bus_v,
        "resistance terminal-to-terminal [mΩ]": 1e3 * unit.model_resistance / 1.5,
        "resistance temperature [°C]": 25.0,
        "inductance terminal-to-terminal [mH]": unit.model_resistance / 1.5 * 5.5,
        "force constant [N/A]": unit.force_constant,
        "pole pitch [mm]": 16.0,
        "moving mass [kg]": unit.mass,
        "continuous current [A]": unit.continuous_current,
        "continuous-rating ambient [°C]": 40.0,
        "peak current [A]": 3.2 * unit.continuous_current,
        "maximum linear speed [m/s]": speed_m_s / FAST,
        "thermal class": "B",
        "thermal resistance winding-housing [K/W]": first,
        "thermal resistance housing-ambient [K/W]": second,
        "winding time constant [s]": first * 0.25 * unit.mass * 385.0,
        "housing time constant [min]": second * 0.75 * unit.mass * 650.0 / 60.0,
        "magnet material": "NdFeB",
        "mass [kg]": unit.mass,
        "price [EUR]": _round(150.0 + 170.0 * unit.mass**0.8, 1.0),
        "source": SOURCE,
    }


def gearheads() -> list[Row]:
    """Every gearhead as a row keyed by heading; two ratios are exact fractions of tooth counts."""
    ratios = (
        ("3", 1),
        ("5", 1),
        ("7", 1),
        ("10", 1),
        ("63/4", 2),
        ("25", 2),
        ("104/3", 2),
        ("50", 2),
        ("100", 3),
    )
    rows = []
    for diameter in (40, 60, 80, 115, 140):
        for ratio, stages in ratios:
            gear = Gear(diameter / 1000.0, ratio, stages)
            rows.append({
                "gearhead": f"planet-{diameter}-{gear.value:.3g}",
                "ratio": ratio,
                "stages": float(stages),
                "continuous torque [Nm]": gear.torque,
                "peak torque [Nm]": (1.5 if ratio in ("10", "100") else 2.0) * gear.torque,
                "emergency-stop torque [Nm]": 4.0 * gear.torque,
                "mean input speed [min⁻¹]": _round(gear.speed_rpm, 50.0),
                "maximum input speed [min⁻¹]": _round(1.8 * gear.speed_rpm, 100.0),
                "efficiency [%]": 100.0 * gear.efficiency,
                "no-load running torque [Ncm]": 100.0 * gear.drag,
                "inertia at input [kg·cm²]": 1e4 * gear.inertia,
                "torsional stiffness [Nm/arcmin]": gear.stiffness_nm_arcmin,
                "backlash [arcmin]": 6.0 + 2.0 * stages,
                "mass [kg]": gear.mass,
                "price [EUR]": _round(gear.price, 1.0),
                "source": SOURCE,
            })  # fmt: skip
    _leave_empty(rows, 8, 3, "peak torque [Nm]")
    _leave_empty(rows, 11, 6, "mean input speed [min⁻¹]")
    _leave_empty(rows, 10, 2, "torsional stiffness [Nm/arcmin]", "backlash [arcmin]")
    return rows


_FEEDERS = (
    *((24.0, "DC", amperes) for amperes in (4.0, 10.0, 25.0)),
    *((48.0, "DC", amperes) for amperes in (4.0, 10.0, 20.0, 40.0)),
    *((48.0, "rms", amperes) for amperes in (6.0, 15.0, 30.0)),
    *((325.0, "rms", amperes) for amperes in (1.5, 3.0, 5.0, 8.0, 13.0, 20.0)),
    *((325.0, "peak", amperes) for amperes in (6.0, 15.0)),
    *((565.0, "rms", amperes) for amperes in (1.5, 3.0, 5.0, 8.0, 14.0, 22.0)),
    *((565.0, "peak", amperes) for amperes in (5.0, 10.0, 25.0)),
)
_BUS_LIMITS = {24.0: (10.0, 36.0), 48.0: (18.0, 62.0), 325.0: (180.0, 420.0), 565.0: (350.0, 800.0)}


def drives() -> list[Row]:
    """Every drive as a row keyed by heading."""
    rows = []
    for bus_v, basis, amperes in _FEEDERS:
        feeder = Feeder(bus_v, basis, amperes)
        low, high = _BUS_LIMITS[bus_v]
        mains = bus_v > 100.0
        rows.append({
            "drive": f"feed-{bus_v:.0f}-{amperes:g}{basis.lower()}",
            "current basis": basis,
            "commutation": "sinusoidal" if basis != "DC" else "brushed / six-step",
            "continuous current [A]": amperes,
            "peak current [A]": (3.0 if mains else 2.5) * amperes,
            "peak time [s]": 2.0 if mains else 4.0,
            "continuous-rating ambient [°C]": 40.0,
            "ambient derating [%/K]": 1.5,
            "altitude derating per 100 m [%]": 1.0,
            "maximum output frequency [Hz]": 600.0,
            "PWM frequency [kHz]": 16.0 if mains else 40.0,
            "minimum load inductance [µH]": 300.0 if mains else 20.0,
            "minimum bus voltage [V]": low,
            "maximum bus voltage [V]": high,
            "internal capacitance [µF]": _round(feeder.power_w / bus_v**2 * (4e4 if mains else 4e3) + 100.0, 10.0),
            "chopper threshold [V]": _round(0.93 * high, 1.0) if mains else None,
            "chopper hysteresis [V]": _round(0.02 * high, 1.0) if mains else None,
            "minimum brake resistor [Ω]": _round(0.93 * high / (1.5 * amperes) + 5.0, 1.0) if mains else None,
            "efficiency [%]": 100.0 * feeder.efficiency,
            "stand-by power [W]": _round((4.0 if mains else 1.5) + 0.002 * feeder.power_w, 0.1),
            "control rate [kHz]": 16.0 if basis != "DC" else 20.0,
            "mass [kg]": feeder.mass,
            "price [EUR]": _round(feeder.price, 1.0),
            "source": SOURCE,
        })  # fmt: skip
    _leave_empty(rows, 9, 5, "peak time [s]")
    _leave_empty(rows, 7, 2, "efficiency [%]")
    return rows


def _leave_empty(rows: list[Row], every: int, first: int, *headings: str) -> None:
    for row in rows[first::every]:
        for heading in headings:
            row[heading] = None


def _round(value: float, step: float) -> float:
    return step * math.floor(value / step + 0.5)


def _text(cell: Cell) -> str:
    """Four significant digits, without an exponent."""
    if cell is None:
        return ""
    if isinstance(cell, str):
        return cell
    if cell == int(cell) and abs(cell) < 1e6:
        return str(int(cell))
    decimals = max(0, 3 - math.floor(math.log10(abs(cell))))
    text = f"{cell:.{decimals}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def as_csv(headings: tuple[str, ...], rows: list[Row]) -> str:
    """Write rows as comma-separated text."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(headings)
    writer.writerows([_text(row.get(heading)) for heading in headings] for row in rows)
    return out.getvalue()


def catalogs() -> dict[str, str]:
    """Every catalogue: file name -> text."""
    return {
        "motors.csv": as_csv(MOTOR_HEADINGS, motors()),
        "gearheads.csv": as_csv(GEARHEAD_HEADINGS, gearheads()),
        "drives.csv": as_csv(DRIVE_HEADINGS, drives()),
    }


if __name__ == "__main__":
    folder = Path(__file__).parent / "catalog"
    folder.mkdir(exist_ok=True)
    for file_name, text in catalogs().items():
        (folder / file_name).write_text(text, encoding="utf-8", newline="\n")
