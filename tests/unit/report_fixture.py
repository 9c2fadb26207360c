"""A small comparison for the tests of the writers: a belt axis that lifts, worked out by hand.

Everything is computed from the constants below with the closed forms of a trapezoid move, so that the numbers
hang together; it is no second sizing chain: friction, efficiency and torque saturation are left out.
"""

from __future__ import annotations

import dataclasses
import math
from types import SimpleNamespace

import numpy as np
import pandas as pd

from actuator_sizing.case.judging import default_limits
from actuator_sizing.case.model import Cycle
from actuator_sizing.core.mechanisms import MECHANISMS
from actuator_sizing.core.parameters import Surroundings
from actuator_sizing.errors import NOTE, WARNING, Problem
from actuator_sizing.sizing.results import (
    FAILS,
    LOW_RESERVE,
    NOT_CHECKED,
    PASSES,
    CheckResult,
    Comparison,
    Rejections,
    SetDetail,
    SetResult,
)

GRAVITY = 9.80665
MASS_UP, MASS_DOWN, RADIUS, RATIO, STROKE, MOVE, DWELL = 12.0, 8.0, 0.03, 5.0, 0.6, 0.6, 0.4
AMBIENT, LIMIT, BUS = 40.0, 130.0, 320.0
COPPER = 1.0 / (235.0 + 25.0)

#: name, torque constant [N·m/A rms], resistance [Ω], rotor inertia [kg·m²], continuous [A rms], mass, price
MOTORS = (
    ("Lynx 60-B", 0.80, 9.0, 1.2e-4, 1.60, 2.1, 310.0),
    ("Lynx 60-C", 0.62, 5.6, 1.2e-4, 2.00, 2.1, 318.0),
    ("Heron 80", 0.85, 5.0, 3.4e-4, 2.90, 3.9, 402.0),
    ("Lynx 40", 0.45, 12.0, 0.4e-4, 0.80, 1.0, 205.0),
    ("Heron 80-S", 1.30, 11.0, 3.4e-4, 1.80, 3.9, 402.0),
)
GEARHEAD = "Planet 70/5"
DRIVES = (("Brook 5", 3.0, 9.0, 260.0), ("Brook 10", 6.0, 18.0, 330.0))
TITLES = {
    "rms_current": ("RMS current", "motor", "A"),
    "winding_temperature": ("winding temperature", "motor", "K"),
    "motor_peak_current": ("motor peak current", "motor", "A"),
    "motor_speed": ("motor speed", "motor", "rad/s"),
    "voltage": ("voltage", "motor", "V"),
    "speed_torque": ("peak torque over speed", "motor", "N·m"),
    "drive_continuous_current": ("drive continuous current", "drive", "A"),
    "drive_peak_current": ("drive peak current", "drive", "A"),
    "gearhead_peak_torque": ("gearhead peak torque", "gearhead", "N·m"),
    "inertia_ratio": ("inertia ratio", "axis", "-"),
}


def cycle_table(constant: float, resistance: float, inertia: float) -> pd.DataFrame:
    """One cycle with both one-sided values at every jump: up, dwell, down, hold on the brake."""
    peak, acceleration = 1.5 * STROKE / MOVE, 4.5 * STROKE / MOVE**2
    third = MOVE / 3.0
    rows: list[tuple[object, ...]] = []

    def piece(segment: str, start: float, length: float, v0: float, a: float, x0: float, mass: float) -> None:
        for tau in np.linspace(0.0, length, 9):
            rows.append((start + tau, segment, x0 + v0 * tau + a * tau**2 / 2.0, v0 + a * tau, a, mass))

    for name, t0, sign, mass, x0 in (
        ("lift", 0.0, 1.0, MASS_UP, 0.0),
        ("lower", MOVE + DWELL, -1.0, MASS_DOWN, STROKE),
    ):
        ramp = sign * acceleration * third**2 / 2.0
        piece(name, t0, third, 0.0, sign * acceleration, x0, mass)
        piece(name, t0 + third, third, sign * peak, 0.0, x0 + ramp, mass)
        end = x0 + ramp + sign * peak * third
        piece(name, t0 + 2 * third, third, sign * peak, -sign * acceleration, end, mass)
        hold = MASS_UP if name == "lift" else 0.0  # the second dwell is on the brake
        label = "place" if name == "lift" else "wait on brake"
        piece(label, t0 + MOVE, DWELL, 0.0, 0.0, x0 + sign * STROKE, hold)
    table = pd.DataFrame(rows, columns=["time_s", "segment", "position", "speed", "acceleration", "mass"])
    to_motor = RADIUS / RATIO
    table["inertia_load_nm"] = table["mass"] * table["acceleration"] * to_motor
    table["gravity_nm"] = table["mass"] * GRAVITY * to_motor
    table["inertia_rotor_nm"] = inertia * table["acceleration"] / to_motor
    table["friction_nm"] = 0.0
    table["process_nm"] = 0.0
    table["losses_nm"] = 0.0
    table["shaft_torque_nm"] = table["mass"] * (table["acceleration"] + GRAVITY) * RADIUS
    table["motor_speed_rad_s"] = table["speed"] / to_motor
    causes = ["inertia_load_nm", "gravity_nm", "inertia_rotor_nm"]
    table["motor_torque_nm"] = table[causes].sum(axis=1)
    table["motor_shaft_torque_nm"] = table["motor_torque_nm"] - table["inertia_rotor_nm"]
    table["current_a"] = table["motor_torque_nm"] / constant
    table["voltage_v"] = resistance * table["current_a"] + constant * table["motor_speed_rad_s"]
    return table.drop(columns="mass")


def mean_square(time: np.ndarray, value: np.ndarray) -> float:
    """Exact for values linear between instants."""
    dt, a, b = np.diff(time), value[:-1], value[1:]
    return float(np.sum(dt * (a * a + a * b + b * b)) / 3.0 / (time[-1] - time[0]))


def segment_table(cycle: pd.DataFrame) -> pd.DataFrame:
    """RMS torque and current of each segment, exact for values linear between instants."""
    rows = []
    for name in cycle["segment"].drop_duplicates():
        part = cycle[cycle["segment"] == name]
        time = part["time_s"].to_numpy()
        torque, current = (mean_square(time, part[c].to_numpy()) for c in ("motor_torque_nm", "current_a"))
        rows.append((math.sqrt(torque), math.sqrt(current), current * (time[-1] - time[0])))
    return pd.DataFrame(rows, columns=["torque_rms_nm", "current_rms_a", "current_squared_a2_s"])


def temperatures(
    loss: float, ripple: float, r1: float, r2: float, tau_w: float, tau_h: float
) -> tuple[pd.DataFrame, pd.DataFrame]:
    """Warm-up to a constant loss in closed form of two separate bodies, and a triangular last cycle."""
    time = np.linspace(0.0, 5.0 * tau_h, 200)
    housing = AMBIENT + loss * r2 * (1.0 - np.exp(-time / tau_h))
    winding = housing + loss * r1 * (1.0 - np.exp(-time / tau_w))
    swing = ripple * (1.0 - np.exp(-time / tau_w))
    warm = pd.DataFrame(
        {
            "time_s": time,
            "winding_degc": winding,
            "housing_degc": housing,
            "winding_low_degc": winding - swing / 2.0,
            "winding_high_degc": winding + swing / 2.0,
        }
    )
    cycle = 2.0 * (MOVE + DWELL)
    last = pd.DataFrame(
        {
            "time_s": [0.0, MOVE, cycle],
            "winding_degc": winding[-1] + np.array([-0.5, 0.5, -0.5]) * ripple,
            "housing_degc": np.full(3, housing[-1]),
        }
    )
    return warm, last


def envelope(constant: float, resistance: float, peak: float, continuous: float) -> pd.DataFrame:
    """Torque over speed at three bus voltages and the continuous curve, from the DC-equivalent model."""
    speed = np.linspace(0.0, 523.6, 120)
    table = {"speed_rad_s": speed}
    for name, bus in (("min", 0.9 * BUS), ("nominal", BUS), ("max", 1.1 * BUS)):
        volts = 0.95 * bus / math.sqrt(2.0 / 3.0)
        torque = np.minimum(constant * peak, constant * (volts - constant * speed) / resistance)
        table[f"torque_peak_{name}_bus_nm"] = np.where(torque > 0.0, torque, np.nan)
    thermal = constant * continuous * np.sqrt(np.clip(1.0 - (speed / 900.0) ** 2, 0.0, None))
    table["torque_continuous_nm"] = np.minimum(thermal, table["torque_peak_min_bus_nm"])
    return pd.DataFrame(table)


def step_response(constant: float, resistance: float, inertia: float) -> pd.DataFrame:
    """Speed and current after a voltage step, inductance left out."""
    tau = resistance * inertia / constant**2
    time = np.linspace(0.0, 6.0 * tau, 150)
    volts = 100.0
    return pd.DataFrame(
        {
            "time_s": time,
            "current_a": volts / resistance * np.exp(-time / tau),
            "speed_rad_s": volts / constant * (1.0 - np.exp(-time / tau)),
        }
    )


def check(key: str, demand: float | None, capacity: float | None, **changes: object) -> CheckResult:
    """One check judged by its utilisation: allowed 1, recommended reserve 0.1."""
    title, group, unit = TITLES[key]
    utilisation = None if demand is None or capacity is None else float(demand / capacity)
    if utilisation is None:
        verdict = NOT_CHECKED
    elif utilisation > 1.0:
        verdict = FAILS
    else:
        verdict = LOW_RESERVE if 1.0 / max(utilisation, 1e-12) - 1.0 < 0.1 else PASSES
    values = {
        "check": key,
        "title": title,
        "group": group,
        "demand": demand,
        "capacity": capacity,
        "unit": unit,
        "utilisation": utilisation,
        "allowed": 1.0,
        "recommended_reserve": 0.1,
        "verdict": verdict,
        "at_time_s": 0.2,
        "segment": "lift",
        "formula": "demand / capacity",
        "source": "hand formula of the test fixture",
        "working": f"{demand} / {capacity} = {utilisation}",
        "missing": () if utilisation is not None else ("gearhead peak torque",),
        "inputs": (("moving mass", "stated"), ("ambient temperature", "assumed")),
        "is_advice": key == "inertia_ratio",
    }
    return CheckResult(**(values | changes))  # type: ignore[arg-type]


def build_set(motor_index: int, drive_index: int, detailed: bool) -> SetResult:
    """Evaluate one motor with the gearhead and one drive."""
    name, constant, resistance, inertia, continuous, mass, price = MOTORS[motor_index]
    drive, drive_continuous, drive_peak, drive_price = DRIVES[drive_index]
    cycle = cycle_table(constant, resistance, inertia)
    time, torque, current = (cycle[c].to_numpy() for c in ("time_s", "motor_torque_nm", "current_a"))
    speed = cycle["motor_speed_rad_s"].to_numpy()
    rms_torque, rms_current = math.sqrt(mean_square(time, torque)), math.sqrt(mean_square(time, current))
    rms_speed = math.sqrt(mean_square(time, speed))
    r1, r2, tau_w, tau_h = 2.2, 4.4, 45.0, 1500.0
    loss = resistance * rms_current**2 * 1.3
    warm, last = temperatures(loss, 4.0, r1, r2, tau_w, tau_h)
    winding = float(last["winding_degc"].max())
    volts = 0.95 * 0.9 * BUS / math.sqrt(2.0 / 3.0)
    peak = 4.0 * continuous
    limits = envelope(constant, resistance, min(peak, drive_peak), continuous)
    reach = np.interp(abs(speed), limits["speed_rad_s"], limits["torque_peak_min_bus_nm"].fillna(0.0))
    use = np.abs(torque) / np.maximum(reach, 1e-9)
    worst = int(np.argmax(use))
    load_inertia = MASS_UP * RADIUS**2 / RATIO**2
    checks = (
        check("speed_torque", abs(torque[worst]), float(reach[worst]), at_time_s=float(time[worst])),
        check("rms_current", rms_current, continuous, at_time_s=None, segment=None,
              formula="I_rms = √(1/t_c ∫ i² dt) ≤ I_cont"),
        check("winding_temperature", winding - AMBIENT, LIMIT - AMBIENT),
        check("motor_peak_current", float(np.abs(current).max()), peak),
        check("motor_speed", float(np.abs(speed).max()), 523.6),
        check("voltage", float(np.abs(cycle["voltage_v"]).max()), volts),
        check("drive_continuous_current", rms_current, drive_continuous, at_time_s=None, segment=None),
        check("drive_peak_current", float(np.abs(current).max()), drive_peak),
        check("gearhead_peak_torque", float(np.abs(cycle["shaft_torque_nm"]).max()), None),
        check("inertia_ratio", load_inertia / inertia, 10.0, at_time_s=None, segment=None),
    )  # fmt: skip
    judged = [c for c in checks if c.utilisation is not None and not c.is_advice]
    governing = max(judged, key=lambda c: c.utilisation)
    worst_first = [FAILS, NOT_CHECKED, LOW_RESERVE, PASSES]
    verdict = min((c.verdict for c in judged), key=worst_first.index)
    detail = SetDetail(
        cycle=cycle,
        periodic_temperature=last,
        warm_up=warm,
        envelope=limits,
        step_response=step_response(constant, resistance, inertia + load_inertia),
        segments=segment_table(cycle),
        bus=bus_table(cycle),
        levels={
            "chopper_threshold_v": 390.0,
            "chopper_release_v": 382.0,
            "drive_bus_max_v": 420.0,
            "drive_bus_min_v": 180.0,
            "supply_continuous_power_w": math.nan,
            "supply_peak_power_w": 2000.0,
            "motor_peak_current_a": peak,
            "drive_peak_current_a": drive_peak,
            "drive_continuous_current_a": drive_continuous,
            "speed_max_rad_s": 523.6,
            "winding_limit_degc": LIMIT,
            "ambient_degc": AMBIENT,
            "voltage_available_v": volts,
        },
    )
    quantities = {
        "torque_peak_nm": float(torque.max()),
        "torque_min_nm": float(torque.min()),
        "torque_rms_nm": rms_torque,
        "current_peak_a": float(np.abs(current).max()),
        "current_rms_a": rms_current,
        "current_basis": "rms",
        "speed_peak_rad_s": float(np.abs(speed).max()),
        "speed_rms_rad_s": rms_speed,
        "voltage_peak_v": float(np.abs(cycle["voltage_v"]).max()),
        "voltage_available_v": volts,
        "winding_max_degc": winding,
        "winding_min_degc": float(last["winding_degc"].min()),
        "housing_max_degc": float(last["housing_degc"].max()),
        "time_to_limit_s": math.nan,
        "speed_torque_margin": 1.0 / float(use.max()) - 1.0,
        "inertia_ratio": load_inertia / inertia,
        "bus_voltage_max_v": None,
        **{f"energy_{part}_per_cycle_j": joules for part, joules in ENERGY_J.items()},
    }
    return SetResult(
        rank=0,
        motor=name,
        gearhead=GEARHEAD,
        ratio=RATIO,
        drive=drive,
        verdict=verdict,
        governing_check=governing.check,
        price=price + drive_price + 240.0,
        mass_kg=mass + 1.6,
        quantities=quantities,
        checks=checks,
        motor_index=motor_index,
        gearhead_index=1,
        drive_index=drive_index,
        detail=detail if detailed else None,
    )


#: What a cycle takes from the supply, and where it goes; the parts add up.
ENERGY_J = {
    "supply": 310.0, "steady": 12.0, "resistor": 46.0, "drive": 21.0, "cable": 0.0, "winding": 64.0,
    "motor_friction": 18.0, "gearhead": 37.0, "mechanism": 52.0, "work": 60.0,
}  # fmt: skip


def bus_table(cycle: pd.DataFrame) -> pd.DataFrame:
    """Power of the motor as that of the bus, which a chopper holds while it comes back."""
    power = cycle["motor_torque_nm"] * cycle["motor_speed_rad_s"]
    high = np.where(power < 0.0, 390.0, 358.0)
    return pd.DataFrame({"time_s": cycle["time_s"], "bus_power_w": power, "bus_voltage_high_v": high,
                         "bus_voltage_low_v": np.full(len(cycle), 290.0)})  # fmt: skip


def entry(table: str, label: str, column: str, entered: str, value: object, unit: str, **more: object):
    """An input as the reader hands it over."""
    values = {
        "table": table, "row": 2, "label": label, "column": column, "as_entered": entered, "value_si": value,
        "unit": unit, "origin": "stated", "rule": "", "source": "drawing 4711 sheet 2",
    }  # fmt: skip
    return SimpleNamespace(**(values | more))


class _Case(SimpleNamespace):
    """A case with one cycle that nothing names, alone on its bus."""

    partners = ()

    def by_cycle(self) -> tuple[SimpleNamespace, ...]:
        return (self,)

    @property
    def cycle(self) -> Cycle:
        return Cycle("", self.segments)


def build_case(name: str = "tray_lift", title: str = "Tray lift") -> SimpleNamespace:
    """The parts of a case that the writers read."""
    lift = {"row": 2, "note": "", "brake_closed": False, "process_effort": 0.0}
    segments = tuple(
        SimpleNamespace(
            **(lift | {"name": n, "law": law, "start_s": t, "duration_s": d, "payload": p} | more)
        )
        for n, law, t, d, p, more in (
            ("lift", "trapezoid", 0.0, MOVE, 4.0, {}),
            ("place", "dwell", MOVE, DWELL, 4.0, {"row": 3}),
            ("lower", "trapezoid", MOVE + DWELL, MOVE, 0.0, {"row": 4}),
            ("wait on brake", "dwell", 2 * MOVE + DWELL, DWELL, 0.0, {"row": 5, "brake_closed": True}),
        )
    )
    entries = (
        entry("axis", "mechanism", "mechanism", "belt", "belt", ""),
        entry("axis", "pulley diameter", "pulley diameter", "60 mm", 0.06, "m", row=3),
        entry("axis", "moving mass", "moving mass", "8 kg", 8.0, "kg", row=4),
        entry("axis", "ambient temperature", "ambient temperature", "", 40.0, "°C", row=None,
              origin="assumed", rule="usual upper limit of indoor machinery", source=""),
        entry("duty_cycle", "lift", "displacement", "600 mm", 0.6, "m"),
        entry("duty_cycle", "lift", "duration", "600 ms", 0.6, "s"),
        entry("limits", "rms_current", "allowed utilisation", "100 %", 1.0, "-"),
    )  # fmt: skip
    parts = {
        "motors": (
            entry("motors", "Lynx 60-B", "torque constant", "0.8 N·m/A", 0.8, "N·m/A", source="sheet rev. 3"),
            entry("motors", "Lynx 60-B", "rotor inertia", "1.2 kg·cm²", 1.2e-4, "kg·m²"),
            entry("motors", "Lynx 60-B", "resistance temperature coefficient", "", 1 / 260.0, "1/K",
                  origin="assumed", rule="copper, 235 K constant"),
        ),
        "gearheads": (entry("gearheads", GEARHEAD, "ratio", "5", 5.0, "-"),),
        "drives": (entry("drives", "Brook 5", "continuous current", "3 Arms", 3.0, "A"),),
    }  # fmt: skip
    belt = MECHANISMS["belt"].from_values(
        {"pulley diameter": 0.06, "moving mass": 8.0, "inclination": math.pi / 2}
    )
    return _Case(
        name=name,
        path=None,
        mechanism=belt,
        surroundings=Surroundings(AMBIENT, 0.0, BUS, 0.9 * BUS, 1.1 * BUS, 0.95, math.nan, 0.001),
        segments=segments,
        options={"title": title, "revision": "B", "prepared by": "M. Okafor", "rank by": "price"},
        entries=entries,
        problems=(
            Problem("motors", 4, "inductance", "52 mH", "3 to 20 mH for this size",
                    "Check whether the sheet gives µH.", WARNING),
            Problem("axis", 9, "colour", "blue", "", "The column is not known and was not used.", NOTE),
        ),
        tolerances=(),
        limits=default_limits(),
        fingerprint="9c6f2b1d" * 8,
        cycle_duration_s=2.0 * (MOVE + DWELL),
        catalog_entries=lambda table, index: parts[table],
        motors=[m[0] for m in MOTORS],
        gearheads=["", GEARHEAD],
        drives=[d[0] for d in DRIVES],
    )  # fmt: skip


def build_comparison() -> Comparison:
    """Compare every motor with every drive: some pass, some fail, one check lacks data."""
    sets = [build_set(m, d, True) for m in range(len(MOTORS)) for d in range(len(DRIVES))]
    order = {PASSES: 0, LOW_RESERVE: 0, NOT_CHECKED: 1, FAILS: 2}

    def key(item: SetResult) -> tuple[float, float]:
        worst = item.check(item.governing_check).utilisation or 0.0
        return order[item.verdict], item.price if order[item.verdict] == 0 else worst

    sets.sort(key=key)
    ranked = tuple(dataclasses.replace(item, rank=i + 1) for i, item in enumerate(sets))
    candidates = pd.DataFrame(
        [
            {
                "motor": s.motor, "gearhead": s.gearhead, "ratio": s.ratio, "drive": s.drive,
                "verdict": s.verdict, "governing_check": s.governing_check,
                "utilisation": s.check(s.governing_check).utilisation,
                "price": s.price, "mass_kg": s.mass_kg,
            }
            for s in ranked
        ]
    )  # fmt: skip
    losers = [s for s in ranked if s.verdict == FAILS]
    counts: dict[str, int] = {}
    for s in losers:
        counts[s.governing_check] = counts.get(s.governing_check, 0) + 1
    passing = sum(s.verdict in (PASSES, LOW_RESERVE) for s in ranked)
    return Comparison(
        case=build_case(),  # type: ignore[arg-type]
        demand=None,  # type: ignore[arg-type]
        ranked_by="price",
        sets=ranked,
        rejections=Rejections(len(ranked) + 10, 10, len(ranked), len(losers), counts, len(ranked), passing,
                              len(ranked), True),
        candidates=candidates,
        cycle={
            "duration_s": 2.0, "travel": 1.2, "speed_peak": 1.5, "acceleration_peak": 7.5,
            "acceleration_rms": math.sqrt(7.5**2 * 0.4), "effort_peak": MASS_UP * (GRAVITY + 7.5),
        },
        assumptions=(("friction", "no friction on the guide was entered; taken as zero"),),
        questions=((GEARHEAD, "peak torque", "gearhead peak torque"),),
        version="0.1.0",
    )  # fmt: skip


HOSTILE = (
    "=1+1",
    "<script>alert(1)</script>",
    "x" * 10_000,
    "\u05de\u05e0\u05d5\u05e2 \u202eabc",
    "motor \U0001f680",
    "two\nlines\r\nand\ttab",
    '"; DROP TABLE #panic("x") $a$ *b* \\ {{ 7*7 }} {% raw %}',
    "@SUM(A1)",
    "+1\x00\x0b",
    "& ' \" ]]> &lt;",
)


def build_hostile() -> Comparison:
    """The same comparison with names that try to break every format."""
    base = build_comparison()
    sets = tuple(
        dataclasses.replace(
            s,
            motor=HOSTILE[i % len(HOSTILE)],
            gearhead=HOSTILE[(i + 1) % len(HOSTILE)],
            drive=HOSTILE[(i + 2) % len(HOSTILE)],
            checks=tuple(dataclasses.replace(c, segment=HOSTILE[(i + 3) % len(HOSTILE)]) for c in s.checks),
        )
        for i, s in enumerate(base.sets)
    )
    case = build_case(name="../=cmd|' /C calc'!A0", title=HOSTILE[1])
    case.entries = tuple(
        entry("axis", text, text, text, text, "", rule=text, source=text) for text in HOSTILE
    ) + (entry("axis", "mass", "mass", "inf kg", math.inf, "kg"), entry("axis", "n", "n", "", None, "A"))
    case.segments = tuple(
        SimpleNamespace(
            **(vars(segment) | {"name": HOSTILE[n], "law": HOSTILE[n + 1], "note": HOSTILE[n + 2]})
        )
        for n, segment in enumerate(case.segments)
    )
    case.problems = tuple(Problem(text, 2, text, text, text, text, WARNING) for text in HOSTILE)
    case.options = {"title": HOSTILE[1], "revision": HOSTILE[0], "prepared by": HOSTILE[5]}
    candidates = base.candidates.assign(
        motor=[s.motor for s in sets], gearhead=[s.gearhead for s in sets], drive=[s.drive for s in sets]
    )
    return dataclasses.replace(
        base,
        case=case,
        sets=sets,
        candidates=candidates,
        assumptions=tuple((text, text) for text in HOSTILE),
        questions=tuple((text, text, text) for text in HOSTILE),
    )
