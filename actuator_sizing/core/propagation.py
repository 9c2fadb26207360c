"""Exact propagation of linear systems: zero-order hold by the matrix exponential."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_TERMS = 14  # of the series below: 0.5¹⁵/15! is less than rounding


def exponential(matrix: FloatArray) -> FloatArray:
    """Exponential of a small matrix.

    Parameters
    ----------
    matrix : ndarray, shape (n, n)
        Any square matrix. [-]

    Returns
    -------
    ndarray, shape (n, n)
        ``exp(matrix)``. [-]

    Notes
    -----
    Scaling and squaring of the Taylor series (C. Moler and C. Van Loan, Nineteen dubious ways to compute the
    exponential of a matrix, SIAM Review 45, 2003), carried as ``exp(X) − 1 → 2 E + E²`` so that small entries
    keep their digits where one large entry asks for much scaling. Products only: for matrices of this size the
    routine of scipy takes milliseconds wherever its linear algebra runs on several threads.

    Examples
    --------
    >>> import numpy as np
    >>> exponential(np.array([[0.0, 1.0], [0.0, 0.0]])).tolist()
    [[1.0, 1.0], [0.0, 1.0]]
    """
    size = float(np.abs(matrix).sum(axis=0).max())
    if not math.isfinite(size):
        raise ValueError("the matrix to be exponentiated has entries that are not finite")
    halvings = max(0, math.frexp(2.0 * size)[1])
    X = matrix * 0.5**halvings
    one = np.eye(len(matrix))
    E = X / _TERMS
    for order in range(_TERMS - 1, 0, -1):
        E = X @ (one + E) / order
    for _ in range(halvings):
        E = E + E + E @ E
    return np.asarray(one + E)


def zero_order_hold(A: FloatArray, B: FloatArray, step_s: float) -> tuple[FloatArray, FloatArray]:
    """Exact step of ``x' = A x + B u`` with the inputs held over the step.

    Parameters
    ----------
    A : ndarray, shape (n, n)
        System matrix. [-]
    B : ndarray, shape (n, m)
        Input matrix. [-]
    step_s : float
        Length of the step. [s]

    Returns
    -------
    Phi : ndarray, shape (n, n)
        ``exp(A h)``. [-]
    Gamma : ndarray, shape (n, m)
        ``∫ exp(A τ) dτ B``. [-]

    Notes
    -----
    Both are blocks of one exponential of the augmented matrix (C. F. Van Loan, Computing integrals involving
    the matrix exponential, IEEE Trans. Automatic Control 23, 1978); no inverse, so integrators do no harm.

    Examples
    --------
    >>> import numpy as np
    >>> Phi, Gamma = zero_order_hold(np.array([[0.0]]), np.array([[2.0]]), 0.5)
    >>> float(Phi[0, 0]), float(Gamma[0, 0])
    (1.0, 1.0)
    """
    n, m = B.shape
    augmented = np.zeros((n + m, n + m))
    augmented[:n, :n], augmented[:n, n:] = A * step_s, B * step_s
    Psi = exponential(augmented)
    return Psi[:n, :n], Psi[:n, n:]


def respond(A: FloatArray, B: FloatArray, start: FloatArray, inputs: FloatArray, step_s: float) -> FloatArray:
    """States at evenly spaced instants with every input held from one instant to the next.

    Parameters
    ----------
    A : ndarray, shape (n, n)
        System matrix. [-]
    B : ndarray, shape (n, m)
        Input matrix. [-]
    start : ndarray, shape (n,)
        States at the first instant. [-]
    inputs : ndarray, shape (N, m)
        Inputs from each instant on. [-]
    step_s : float
        Distance of the instants. [s]

    Returns
    -------
    ndarray, shape (N, n)
        States at each instant, before its input acts. [-]

    Notes
    -----
    Exact for held inputs, whatever the step.

    Examples
    --------
    >>> import numpy as np
    >>> respond(np.array([[-1.0]]), np.array([[1.0]]), np.zeros(1), np.ones((2, 1)), 1.0)[:, 0].tolist()
    [0.0, 0.6321]
    """
    Phi, Gamma = zero_order_hold(A, B, step_s)
    driven = inputs @ Gamma.T
    states = np.empty((len(inputs), len(start)))
    x = np.asarray(start, dtype=float)
    for k in range(len(inputs)):
        states[k] = x
        x = Phi @ x + driven[k]
    return states
