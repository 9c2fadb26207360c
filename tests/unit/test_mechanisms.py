"""Every mechanism against Lagrange's equation written out by sympy, forward simulation, and energy."""

from dataclasses import replace

import numpy as np
import pytest
import sympy as sp
from scipy.integrate import solve_ivp

from actuator_sizing.core.mechanisms import GRAVITY_M_S2, MECHANISMS
from actuator_sizing.core.quadrature import (
    antiderivative_matrix,
    integrate,
    interpolate,
    lobatto,
    to_series,
)
from actuator_sizing.sizing.demand import CAUSES, build_demand
from tests.made_cases import case, cycle

# What the cutting of pieces promises for interpolation, and so for integrals over them.
PROMISED = 1e-9

q, w, t = sp.symbols("q w t")
G = GRAVITY_M_S2

TURN = (
    {"law": "cycloidal", "displacement": 2 * np.pi, "duration_s": 1.1},
    {"law": "dwell", "duration_s": 0.2},
)
BACK_AND_FORTH = (
    {"law": "4-5-6-7 polynomial", "displacement": 0.9, "duration_s": 0.8, "payload": 1.5},
    {"law": "dwell", "duration_s": 0.1, "payload": 1.5},
    {"law": "modified sine", "displacement": -0.9, "duration_s": 0.5, "payload": 1.5},
)

_CAM_ANGLES = np.radians(np.arange(0.0, 361.0, 30.0))
CAM = tuple(zip(_CAM_ANGLES.tolist(), (0.02 * (1.0 - np.cos(_CAM_ANGLES)) ** 2).tolist(), strict=True))
SWING = tuple(zip(_CAM_ANGLES.tolist(), (0.3 * np.sin(_CAM_ANGLES)).tolist(), strict=True))

FRICTION = {"guide friction force": 12.0, "guide friction coefficient": 0.05, "viscous friction": 3.0}
TURNING = {"friction torque": 0.4, "viscous friction": 0.02}
STAGE = {"efficiency": 0.85, "driven shaft inertia": 2e-3, "driven shaft friction torque": 0.1}

# name: values without losses, losses, cycle, map
SPEC = {
    "crank-slider": ({"crank radius": 0.04, "rod length": 0.15, "slide offset": 0.012, "moving mass": 3.0,
                      "inclination": 0.6, "start angle": 0.4, "driven shaft inertia": 2e-3, "rod mass": 0.9,
                      "rod centre": 0.06, "rod inertia": 2.5e-3},
                      STAGE | FRICTION, TURN, ()),
    "Scotch yoke": ({"crank radius": 0.04, "moving mass": 3.0, "inclination": -0.4, "start angle": 0.4},
                    STAGE | FRICTION, TURN, ()),
    "toggle lever": ({"lever length": 0.06, "link length": 0.07, "moving mass": 3.0, "start angle": -1.1,
                      "inclination": 0.3, "link mass": 1.1}, STAGE | FRICTION, BACK_AND_FORTH, ()),
    "eccentric": ({"eccentricity": 0.008, "disc radius": 0.03, "roller radius": 0.012, "moving mass": 2.0,
                   "return spring rate": 5e3, "return spring preload": 150.0, "inclination": 1.2,
                   "driven shaft inertia": 1e-3},
                  STAGE | FRICTION, TURN, ()),
    "four-bar": ({"crank radius": 0.04, "coupler length": 0.15, "rocker length": 0.1, "ground length": 0.16,
                  "load inertia": 0.05, "lever mass": 1.2, "lever mass radius": 0.1, "lever mass angle": 0.2,
                  "start angle": 0.3, "driven shaft inertia": 1e-3, "coupler mass": 1.4, "coupler centre": 0.11,
                  "coupler inertia": 4e-3, "ground inclination": 0.5}, STAGE | TURNING, TURN, ()),
    "tabulated slider": ({"map period": 2 * np.pi, "moving mass": 2.0, "inclination": 0.9}, STAGE | FRICTION,
                         TURN, CAM),
    "tabulated lever": ({"load inertia": 0.05, "lever mass": 1.2, "lever mass radius": 0.1, "start angle": 1.0},
                        STAGE | TURNING, BACK_AND_FORTH, SWING),
    "arm": ({"arm mass": 4.0, "arm mass radius": 0.2, "payload radius": 0.35, "load inertia": 0.25,
             "start angle": -0.3,
             "counterweight mass": 3.0, "counterweight radius": 0.1, "spring rate": 2500.0,
             "spring free length": 0.12,
             "spring anchor radius": 0.2, "spring anchor angle": 1.7, "spring arm radius": 0.1},
            TURNING | {"breakaway torque": 1.2, "Stribeck speed": 0.1}, BACK_AND_FORTH, ()),
    "unbalanced table": ({"eccentric mass": 3.0, "eccentricity": 0.05, "axis inclination": 0.7, "load inertia": 0.1,
                          "start angle": 0.5}, TURNING, TURN, ()),
    "winch": ({"drum diameter": 0.12, "rope diameter": 0.008, "turns per layer": 6.0, "turns at start": 4.0,
               "falls": 2.0, "moving mass": 30.0}, STAGE | {"viscous friction": 5.0}, BACK_AND_FORTH, ()),
    "conveyor": ({"drum diameter": 0.12, "belt mass": 4.0, "roller mass": 1.0, "moving mass": 9.0,
                  "inclination": 0.2},
                 STAGE | FRICTION, BACK_AND_FORTH, ()),
    "wheel drive": ({"wheel diameter": 0.2, "adhesion coefficient": 0.6, "moving mass": 40.0, "inclination": 0.05},
                    STAGE | FRICTION, BACK_AND_FORTH, ()),
    "gantry": ({"pinion diameter": 0.06, "moving mass": 20.0, "carriage mass": 6.0, "carriage share": 0.8,
                "inclination": 0.1}, STAGE | FRICTION, BACK_AND_FORTH, ()),
    "fan": ({"rated speed": 90.0, "rated torque": 0.0, "load inertia": 0.02}, TURNING | {"rated torque": 0.6,
            "static torque": 0.1}, BACK_AND_FORTH, ()),
    "displacement pump": ({"displacement volume": 4e-6, "pressure difference": 0.0, "load inertia": 1e-3},
                          TURNING | {"pressure difference": 1.2e6, "hydromechanical efficiency": 0.9},
                          BACK_AND_FORTH, ()),
}  # fmt: skip

NEW = sorted(SPEC)


def build(name, extra=None, rows=None, at=""):
    values, _, own_rows, points = SPEC[name]
    made = case("rotary load", {"load inertia": 1.0}, cycle(*(rows or own_rows)))
    mechanism = MECHANISMS[name].from_values({**values, **(extra or {})}, points)
    assert list(mechanism.complaints()) == []
    return replace(made, mechanism=mechanism, options={**made.options, "motion stated at": at or None})


def energies(name, v, payload):
    """Kinetic energy (with `w` for the shaft's speed) and potential energy over the stated coordinate q."""
    mass = v.get("moving mass", 0.0) + payload
    slope = sp.sin(v.get("inclination", 0.0))
    J = v.get("driven shaft inertia", 0.0)

    def slider(x):
        return (mass * sp.diff(x, q) ** 2 + J) * w**2 / 2, mass * G * slope * x

    def rod(angle, crank, length, offset=0.0):
        return crank * sp.cos(angle) + sp.sqrt(length**2 - (crank * sp.sin(angle) - offset) ** 2)

    def link(m, centre, inertia, pin, far, length, up):
        """A rigid link between two moving points: its centre's speed, its own turning, its height."""
        along = [(f - p) / length for p, f in zip(pin, far, strict=True)]
        middle = [p + centre * e for p, e in zip(pin, along, strict=True)]
        turn = along[0] * sp.diff(along[1], q) - along[1] * sp.diff(along[0], q)
        T = (m * sum(sp.diff(x, q) ** 2 for x in middle) + inertia * turn**2) * w**2 / 2
        return T, m * G * sum(x * u for x, u in zip(middle, up, strict=True))

    angle = q + v.get("start angle", 0.0)
    if name in ("crank-slider", "toggle lever"):
        a, b, e, m, s, J_rod = (
            (v["crank radius"], v["rod length"], v["slide offset"], v["rod mass"], v["rod centre"], v["rod inertia"])
            if name == "crank-slider"
            else (v["lever length"], v["link length"], 0.0, v["link mass"], v["link length"] / 2,
                  v["link mass"] * v["link length"] ** 2 / 12)
        )  # fmt: skip
        x = rod(angle, a, b, e)
        T, V = slider(x)
        up = (sp.sin(v["inclination"]), sp.cos(v["inclination"]))  # along the slide and across it
        T_rod, V_rod = link(m, s, J_rod, (a * sp.cos(angle), a * sp.sin(angle)), (x, sp.Float(e)), b, up)
        return T + T_rod, V + V_rod
    if name == "Scotch yoke":
        return slider(v["crank radius"] * sp.cos(angle))
    if name == "eccentric":
        x = rod(angle, v["eccentricity"], v["disc radius"] + v["roller radius"])
        T, V = slider(x)
        squeezed = x - (v["disc radius"] + v["roller radius"] - v["eccentricity"])
        return T, V + v["return spring preload"] * squeezed + v["return spring rate"] * squeezed**2 / 2
    if name == "four-bar":
        a, b, c, d = (v[f"{p}"] for p in ("crank radius", "coupler length", "rocker length", "ground length"))
        # Freudenstein's closed form by the half angle, another way to the same rocker angle.
        A = -2 * a * c * sp.sin(angle)
        B = 2 * c * (d - a * sp.cos(angle))
        C = a**2 - b**2 + c**2 + d**2 - 2 * a * d * sp.cos(angle)
        # A sin ψ + B cos ψ + C = 0
        psi = 2 * sp.atan((-A - sp.sqrt(A**2 + B**2 - C**2)) / (C - B))
        T = (v["load inertia"] * sp.diff(psi, q) ** 2 + J) * w**2 / 2
        V = v["lever mass"] * v["lever mass radius"] * G * sp.sin(psi + v["lever mass angle"])
        crank_pin = (a * sp.cos(angle), a * sp.sin(angle))
        rocker_pin = (d + c * sp.cos(psi), c * sp.sin(psi))
        up = (sp.sin(v["ground inclination"]), sp.cos(v["ground inclination"]))
        own = (v["coupler mass"], v["coupler centre"], v["coupler inertia"])
        T_coupler, V_coupler = link(*own, crank_pin, rocker_pin, b, up)
        return T + T_coupler, V + V_coupler
    if name == "arm":
        m, lm, mc, lc = (
            v[p] for p in ("arm mass", "arm mass radius", "counterweight mass", "counterweight radius")
        )
        J = v["load inertia"] + payload * v["payload radius"] ** 2 + mc * lc**2
        r, b = v["spring anchor radius"], v["spring arm radius"]
        dx = r * sp.cos(v["spring anchor angle"]) - b * sp.cos(angle)
        dy = r * sp.sin(v["spring anchor angle"]) - b * sp.sin(angle)
        spring = v["spring rate"] * (sp.sqrt(dx**2 + dy**2) - v["spring free length"]) ** 2 / 2
        return J * w**2 / 2, (m * lm + payload * v["payload radius"] - mc * lc) * G * sp.sin(angle) + spring
    if name == "unbalanced table":
        me = v["eccentric mass"] * v["eccentricity"]
        J = v["load inertia"] + me * v["eccentricity"] + payload
        return J * w**2 / 2, me * G * sp.sin(v["axis inclination"]) * sp.sin(angle)
    if name == "winch":  # stated at the shaft here
        r = (v["drum diameter"] + v["rope diameter"]) / 2
        c = v["rope diameter"] / (2 * sp.pi * v["turns per layer"])
        full = q + 2 * sp.pi * v["turns at start"]
        x = (r * full + c * full**2 / 2) / v["falls"]
        return mass * sp.diff(x, q) ** 2 * w**2 / 2, mass * G * x
    if name == "conveyor":
        x = q * v["drum diameter"] / 2
        return (mass + v["belt mass"] + v["roller mass"]) * sp.diff(
            x, q
        ) ** 2 * w**2 / 2, mass * G * slope * x
    if name == "wheel drive":
        return slider(q * v["wheel diameter"] / 2)
    if name == "gantry":
        x = q * v["pinion diameter"] / 2
        share = v["moving mass"] / 2 + v["carriage share"] * (v["carriage mass"] + payload)
        return share * sp.diff(x, q) ** 2 * w**2 / 2, share * G * slope * x
    return (v["load inertia"] + payload) * w**2 / 2, sp.Integer(0)  # fan, pump


LAGRANGE = [name for name in NEW if not name.startswith("tabulated")]


def lagrange(name, payload):
    """Torque as a function of q, its speed and acceleration: d/dt ∂L/∂w − ∂L/∂q."""
    T, V = energies(name, SPEC[name][0], payload)
    a = sp.Symbol("a")
    momentum = sp.diff(T, w)
    torque = sp.diff(momentum, w) * a + sp.diff(momentum, q) * w - sp.diff(T - V, q)
    return sp.lambdify((q, w, a), torque, "numpy")


@pytest.mark.parametrize("name", LAGRANGE)
def test_torque_without_losses_is_that_of_lagrange(name):
    made = build(name, at="shaft")
    demand = build_demand(made)
    payload = made.segments[0].payload
    expected = lagrange(name, payload)
    turned = 0.5 * demand.duration_s * (demand.shaft_speed @ lobatto()[1])
    angle = np.concatenate([[0.0], np.cumsum(turned)])
    series = demand.shaft_speed @ to_series().T @ antiderivative_matrix().T
    nodes = np.polynomial.legendre.legvander(lobatto()[0], series.shape[1] - 1)
    phi = angle[:-1, None] + 0.5 * demand.duration_s[:, None] * (series @ nodes.T)
    torque = expected(phi, demand.shaft_speed, demand.shaft_acceleration) + 0.0 * phi
    # Both are closed forms; the angle comes from integrating an interpolant that is good to 1e-10.
    np.testing.assert_allclose(demand.shaft_torque, torque, atol=PROMISED * np.max(np.abs(torque)))


@pytest.mark.parametrize("name", NEW)
def test_inertia_and_gravity_take_no_work_over_a_closed_cycle(name):
    made = build(name, SPEC[name][1])
    demand = build_demand(made)
    work = {
        c: float(integrate(demand.duration_s, demand.torque_by_cause[c] * demand.shaft_speed)) for c in CAUSES
    }
    flow = float(integrate(demand.duration_s, np.abs(demand.shaft_torque * demand.shaft_speed)))
    assert abs(work["inertia"] + work["gravity"]) <= PROMISED * flow
    total = float(integrate(demand.duration_s, demand.shaft_torque * demand.shaft_speed))
    assert total == pytest.approx(work["friction"] + work["process"] + work["losses"], abs=PROMISED * flow)
    assert work["friction"] > 0.0
    assert work["losses"] >= 0.0
    effort_work = float(integrate(demand.duration_s, demand.effort * demand.speed))
    drag = made.mechanism.shaft_friction_nm * float(integrate(demand.duration_s, np.abs(demand.shaft_speed)))
    assert total == pytest.approx(effort_work + drag + work["losses"], abs=PROMISED * flow)


@pytest.mark.parametrize("name", NEW)
def test_pieces_are_resolved(name):
    """Halving a piece changes nothing: values between the nodes are those of the mechanism."""
    made = build(name, SPEC[name][1])
    demand = build_demand(made)
    at = np.array([-0.77, -0.31, 0.03, 0.52, 0.91])
    x = interpolate(demand.position, at)
    v, a = interpolate(demand.speed, at), interpolate(demand.acceleration, at)
    payload = np.array([made.segments[i].payload for i in demand.segment])[:, None]
    direction = np.sign(demand.speed[:, 8])[:, None] * np.ones_like(x)
    for row in range(len(x)):
        found = made.mechanism.efforts(
            x[row], v[row], a[row], direction[row], payload[row], 0.0 * x[row]
        ).total
        between = interpolate(demand.effort[row], at)
        # Position, speed and acceleration are interpolated too, each to 1e-10 of its largest value.
        np.testing.assert_allclose(between, found, atol=3e-9 * demand.peak(demand.effort) + 1e-12)


@pytest.mark.parametrize("name", ["crank-slider", "four-bar", "toggle lever", "eccentric", "winch"])
def test_the_demanded_torque_moves_the_chain_as_prescribed(name):
    """Feed the torque to the equation of motion; the motion that was asked for comes back."""
    made = build(
        name, rows=({"law": "3-4-5 polynomial", "displacement": 0.8, "duration_s": 0.5},), at="shaft"
    )
    demand = build_demand(made)
    T, V = energies(name, SPEC[name][0], 0.0)
    J = sp.lambdify(q, sp.diff(T, w, 2), "numpy")
    dJ = sp.lambdify(q, sp.diff(T, w, 2, q), "numpy")
    dV = sp.lambdify(q, sp.diff(V, q), "numpy")

    def torque(time):
        piece = min(int(np.searchsorted(demand.start_s, time, side="right")) - 1, len(demand.start_s) - 1)
        at = 2.0 * (time - demand.start_s[piece]) / demand.duration_s[piece] - 1.0
        return float(interpolate(demand.shaft_torque[piece], np.array([at]))[0])

    def motion(time, state):
        angle, speed = state
        return [speed, (torque(time) - 0.5 * dJ(angle) * speed**2 - dV(angle)) / J(angle)]

    state = [0.0, 0.0]
    for begin, span in zip(demand.start_s, demand.duration_s, strict=True):
        run = solve_ivp(motion, (begin, begin + span), state, rtol=1e-11, atol=1e-13, method="DOP853")
        state = run.y[:, -1]
    # The chain is not stable: 1e-10 in torque grows over the half second.
    assert state[0] == pytest.approx(0.8, abs=1e-6)
    assert state[1] == pytest.approx(0.0, abs=1e-5)


@pytest.mark.parametrize(
    "name", ["crank-slider", "four-bar", "toggle lever", "tabulated lever", "winch", "winder"]
)
def test_motion_of_the_load_turns_the_shaft_as_motion_of_the_shaft_moves_the_load(name):
    values, losses, _, points = SPEC.get(name, (ROLL, {}, (), ()))
    mechanism = MECHANISMS[name].from_values({**values, **losses}, points)
    start = mechanism.start_angle
    low, high = mechanism.branch if name not in ("winch", "winder") else (start - 3.0, start + 3.0)
    phi = np.linspace(low + 0.1 * (high - low), high - 0.1 * (high - low), 9) - start
    there = mechanism.transfer(phi, True)
    back = mechanism.transfer(there.position, False)
    np.testing.assert_allclose(back.shaft_rate, 1.0 / there.load_rate, rtol=1e-9)
    np.testing.assert_allclose(back.shaft_bend, -there.load_bend / there.load_rate**3, rtol=1e-8, atol=1e-9)
    np.testing.assert_allclose(back.lever, there.lever, rtol=1e-9)


ROLL = {"web tension": 60.0, "web thickness": 4e-4, "web width": 0.3, "web density": 900.0, "core diameter": 0.08,
        "start diameter": 0.12, "driven shaft inertia": 4e-3}  # fmt: skip


@pytest.mark.parametrize(("name", "sign"), [("winder", 1.0), ("unwinder", -1.0)])
def test_roll_energy_balance_counts_the_kinetic_energy_of_the_web(name, sign):
    """∫Tω = ±F L + change of the roll's kinetic energy ∓ kinetic energy that the web brings or takes."""
    start = 0.12 if name == "winder" else 0.3
    rows = (
        {"law": "speed ramp", "end_speed": 3.0, "duration_s": 2.0},
        {"law": "constant speed", "end_speed": 3.0, "duration_s": 20.0},
    )
    made = replace(
        case("rotary load", {"load inertia": 1.0}, cycle(*rows)),
        mechanism=MECHANISMS[name].from_values({**ROLL, "start diameter": start}),
    )
    demand = build_demand(made)
    length, area = 63.0, 4e-4 * 63.0
    r = np.sqrt(start**2 / 4 + sign * area / np.pi)
    roll = 900.0 * 0.3 * np.pi / 2 * (r**4 - 0.04**4) + 4e-3
    kinetic = roll * (3.0 / r) ** 2 / 2
    # Web that passes while the speed rises as 1.5 t: dm = ρ b h dx, ½ v² dm.
    per_metre = 900.0 * 0.3 * 4e-4
    passed = per_metre / 2 * (2.0 * 3.0**3 / 4.0 + 20.0 * 3.0**3)
    work = float(integrate(demand.duration_s, demand.shaft_torque * demand.shaft_speed))
    assert work == pytest.approx(sign * 60.0 * length + kinetic - sign * passed, rel=PROMISED)
    assert demand.position[-1, -1] == pytest.approx(length)


def test_breakaway_acts_at_the_very_start_and_fades():
    made = replace(
        case("rotary load", {"load inertia": 1.0}, cycle(*(row | {"payload": 0.0} for row in BACK_AND_FORTH))),
        mechanism=MECHANISMS["rotary load"].from_values(
            {"load inertia": 0.0, "friction torque": 2.0, "breakaway torque": 5.0, "Stribeck speed": 0.02,
             "cold grease factor": 1.5}),
    )  # fmt: skip
    demand = build_demand(made)
    assert demand.shaft_torque[0, 0] == 7.5  # at zero speed, in the direction in which it will move
    middle = int(np.argmax(np.max(demand.speed, axis=1)))
    assert np.max(demand.shaft_torque[middle]) == pytest.approx(3.0)
    assert demand.shaft_torque_peak == pytest.approx(7.5, rel=1e-9)
    still = demand.direction == 0.0
    assert np.all(demand.shaft_torque[still] == 0.0)  # nothing is counted on at rest, and nothing chatters
    assert np.all(np.abs(demand.shaft_torque[~still]) >= 3.0 - 1e-9)


def test_reversal_keeps_friction_against_the_motion():
    made = replace(
        case("rotary load", {"load inertia": 1.0}, cycle(
            {"law": "speed ramp", "end_speed": 2.0, "duration_s": 1.0},
            {"law": "speed ramp", "end_speed": -2.0, "duration_s": 1.0},
            {"law": "speed ramp", "end_speed": 0.0, "duration_s": 1.0})),
        mechanism=MECHANISMS["rotary load"].from_values({"load inertia": 0.0, "friction torque": 2.0}),
    )  # fmt: skip
    demand = build_demand(made)
    assert len(demand.duration_s) == 4  # the ramp through zero is two pieces, each with one sign
    np.testing.assert_array_equal(demand.shaft_torque, 2.0 * demand.direction[:, None] * np.ones((4, 16)))
    np.testing.assert_array_equal(demand.direction, [1.0, 1.0, -1.0, -1.0])


def test_the_figure_shows_friction_without_chatter_at_rest_and_reversal():
    from actuator_sizing.sizing import compare
    from tests.made_cases import DIRECT, MOTOR

    made = replace(
        case("rotary load", {"load inertia": 1.0}, cycle(
            {"law": "speed ramp", "end_speed": 20.0, "duration_s": 1.0},
            {"law": "speed ramp", "end_speed": -20.0, "duration_s": 2.0},
            {"law": "speed ramp", "end_speed": 0.0, "duration_s": 1.0},
            {"law": "dwell", "duration_s": 0.5}),
            motors=[{**MOTOR, "friction_torque_nm": 0.0, "viscous_friction_nm_s": 0.0}], gearheads=[DIRECT]),
        mechanism=MECHANISMS["rotary load"].from_values(
            {"load inertia": 1e-4, "friction torque": 0.2, "breakaway torque": 0.5, "Stribeck speed": 0.5}),
    )  # fmt: skip
    shown = compare(made).best.detail.cycle
    time, friction, speed = (
        shown[name].to_numpy() for name in ("time_s", "friction_nm", "motor_speed_rad_s")
    )
    assert np.max(np.abs(friction)) == pytest.approx(0.5, rel=1e-9)  # breakaway, and no spike above it
    assert np.all(friction * speed >= -1e-9)  # zero speed is rounding at the ends of pieces
    signs = np.sign(friction[time < 4.0])
    assert np.count_nonzero(np.diff(signs)) == 1  # one jump, at the reversal
    assert np.all(friction[time > 4.0] == 0.0)
