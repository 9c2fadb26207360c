"""What the bounds of the checks are made of: declared by the checks, worked out for a million pairs at once.

A bound is a fraction whose parts are products of something of the gearhead and something of the motor, beside the
two quantities that each pair of motor and gearhead has of its own: the mean square of the air-gap torque and a lower
bound of its peak. Written so, it is worked out by a few matrix products (`sizing/tile.py`) or by compiled loops.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

#: In single precision a sum of same-signed parts errs by less than this part of itself.
SINGLE_SLACK = 1e-6


@dataclass(frozen=True)
class Form:
    """A sum of products, ``rows @ columns`` with shape (N, M): parts of N gearheads with parts of M motors.

    In double precision where the parts may cancel (`form`), else in single, which is twice as fast.
    """

    rows: FloatArray  # (N, k)
    columns: FloatArray  # (k, M)

    def part(self, which: slice) -> Form:
        """The same for some of the gearheads."""
        return Form(self.rows[which], self.columns)


@dataclass(frozen=True)
class Ratio:
    """Lower bound of a utilisation or of its square, for N gearheads against M motors.

    ``(top + offset + per_peak · T̂ + per_square · q) / (bottom − drain · q)`` with ``q`` the mean square of the
    air-gap torque and ``T̂`` a lower bound of its peak. A denominator of zero or less stands for what is out of
    reach: the ratio becomes immense. What is not known is left out, so that a bound without its data is zero.

    Attributes
    ----------
    top, offset, bottom : Form or None
        Shape (N, M); 0, 0 and 1 where left out.
    braking : ndarray, shape (M,), or None
        Factor of at least 1 by which a negative top counts.
    per_peak, per_square, drain : ndarray, shape (M,), or None
        Of the motors; 0 where left out.
    is_squared : bool
        Whether it bounds the square of the utilisation.
    """

    top: Form | None = None
    braking: FloatArray | None = None
    offset: Form | None = None
    per_peak: FloatArray | None = None
    per_square: FloatArray | None = None
    bottom: Form | None = None
    drain: FloatArray | None = None
    is_squared: bool = False


#: What a check gives the screening: ratios of which the largest counts, or an array that does not depend on the
#: motor, shape (N, 1), NaN where not known.
Bound = tuple[Ratio, ...] | FloatArray


def single(values: FloatArray) -> FloatArray:
    """Values in single precision without gaps; what is not known or infinite becomes zero. [-]"""
    known = np.nan_to_num(np.asarray(values, dtype=float), nan=0.0, posinf=0.0, neginf=0.0)
    return np.ascontiguousarray(known, dtype=np.float32)


def form(rows: FloatArray, columns: FloatArray) -> Form:
    """A sum of products in the precision that it needs.

    Parameters
    ----------
    rows : ndarray, shape (N, k)
        Parts of the gearheads. [-]
    columns : ndarray, shape (k, M)
        Parts of the motors; what is not known or infinite becomes zero. [-]

    Returns
    -------
    Form
        In single precision where no part can be of another sign than the rest, so that nothing cancels. [-]
    """
    rows = np.ascontiguousarray(rows)
    columns = np.ascontiguousarray(np.nan_to_num(columns, nan=0.0, posinf=0.0, neginf=0.0))
    if columns.min(initial=0.0) >= 0.0 and (rows.min(initial=0.0) >= 0.0 or rows.max(initial=0.0) <= 0.0):
        return Form(single(rows), single(columns))
    return Form(rows, columns)
