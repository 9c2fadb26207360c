"""The sizing of one set written a second time, by converged Gauss quadrature, for comparison.

Shares only the motion (position, speed, acceleration of the phases) with the package; torque, losses and
energies are written from the physics again and integrated between kinks that are found by bisection. The
quadrature is raised until it no longer moves, so that it carries no error of its own worth naming.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.integrate import fixed_quad
from scipy.optimize import brentq, minimize_scalar

from actuator_sizing.case.model import Case

G = 9.80665


@dataclass
class PointModel:
    """Motor torque, current and powers of one motor and gearhead on a ball screw."""

    case: Case
    motor: int
    gearhead: int
    R: float
    K: float

    def at(self, segment, phase, tau, s):
        """Everything at instants `tau` of a phase, `s` being the direction of motion there."""
        m, g = self.case.motor_parameters, self.case.gearhead_parameters
        mech = self.case.mechanism
        i, j = self.motor, self.gearhead
        _, v, a, _ = phase.kinematics(np.atleast_1d(np.asarray(tau, dtype=float)))
        mass = mech.moving_mass + segment.payload
        weight = mass * G
        guide = mech.guide_friction_force + mech.guide_friction_coefficient * weight * np.cos(
            mech.inclination
        )
        F = (
            mass * a
            + weight * np.sin(mech.inclination)
            + s * guide
            + mech.viscous_friction * v
            + segment.process_effort
        )
        r = 2 * np.pi / mech.lead
        omega, alpha = r * v, r * a
        eta, eta_b = mech.efficiency, 2 - 1 / mech.efficiency
        k = np.ones_like(F) if s == 0 else np.where(F * s > 0, 1 / eta, eta_b)
        T_s = F / r * k + mech.driven_shaft_inertia * alpha + s * mech.driven_shaft_friction_torque
        n = g.ratio[j]
        kg = np.ones_like(F) if s == 0 else np.where(T_s * s > 0, 1 / g.efficiency[j], g.efficiency_back[j])
        held = 0.0 if (segment.brake_closed and s == 0) else 1.0
        T_shaft = held * kg * T_s / n + g.inertia_kg_m2[j] * n * alpha + g.no_load_torque_nm[j] * s
        T = (
            T_shaft
            + m.rotor_inertia_kg_m2[i] * n * alpha
            + m.friction_torque_nm[i] * s
            + m.viscous_friction_nm_s[i] * n * omega
        )
        w = n * omega
        copper = self.R * (T / self.K) ** 2
        return {
            "torque": T,
            "shaft": T_shaft * w,
            "airgap": T * w,
            "terminals": T * w + copper,
            "copper": copper,
            "load_sign": F,
            "stage_sign": T_s,
        }

    def parts(self):
        """Every smooth part of the cycle: segment, phase, direction, begin, end."""
        for segment in self.case.segments:
            for phase in segment.phases:
                v = phase.kinematics(np.array([0.5 * phase.duration_s]))[1][0]
                s = float(np.sign(v))  # rest-to-rest laws do not turn back inside a phase
                grid = 0.5 * phase.duration_s * (1.0 - np.cos(np.linspace(0.0, np.pi, 2001)))  # dense at ends
                borders = {0.0, phase.duration_s}
                for key in ("load_sign", "stage_sign", "airgap", "terminals", "shaft"):
                    value = self.at(segment, phase, grid, s)[key]
                    for k in np.flatnonzero(value[:-1] * value[1:] < 0):
                        borders.add(
                            brentq(
                                lambda t, q=key, sg=segment, p=phase, d=s: self.at(sg, p, t, d)[q][0],
                                grid[k],
                                grid[k + 1],
                                xtol=1e-15,
                            )
                        )
                ordered = sorted(borders)
                for begin, end in zip(ordered[:-1], ordered[1:], strict=True):
                    yield segment, phase, s, begin, end

    def integrate(self, function):
        """Integral over the cycle of a function of the point."""
        total = 0.0
        for segment, phase, s, begin, end in self.parts():

            def f(t, sg=segment, p=phase, d=s):
                return function(self.at(sg, p, t, d))

            coarse = fixed_quad(f, begin, end, n=40)[0]
            fine = fixed_quad(f, begin, end, n=60)[0]
            assert abs(fine - coarse) <= 1e-12 * (abs(fine) + 1.0), "the reference itself has not converged"
            total += fine
        return total

    def peak(self, key):
        """Largest magnitude over the cycle."""
        best = 0.0
        for segment, phase, s, begin, end in self.parts():
            grid = np.linspace(begin, end, 400)
            value = np.abs(self.at(segment, phase, grid, s)[key])
            k = int(value.argmax())
            found = minimize_scalar(
                lambda t, sg=segment, p=phase, d=s: -abs(self.at(sg, p, t, d)[key][0]),
                bounds=(grid[max(k - 1, 0)], grid[min(k + 1, 399)]),
                method="bounded",
                options={"xatol": 1e-13},
            )
            best = max(best, float(value[k]), float(-found.fun))
        return best
