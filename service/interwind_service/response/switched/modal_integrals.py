"""Integrals of products of modal sums, in closed form.

    ∫₀^τ t^n e^{at} dt:    expm1(aτ)/a for n = 0; else by series, Gauss-Legendre or upward recurrence as |aτ| grows

so mean powers, mean squares and harmonics come from the exact solution and not from samples.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(tol.GAUSS_NODES)
_PANEL_NODES, _PANEL_WEIGHTS = np.polynomial.legendre.leggauss(tol.PANEL_NODES)


def power_exponential(n: NDArray[np.int64], a: ComplexArray, tau: FloatArray) -> ComplexArray:
    """Return ∫₀^τ t^n e^{at} dt, elementwise, shapes broadcast; exact to rounding for every aτ."""
    n, a, tau = np.broadcast_arrays(n, a, tau)
    z = a * tau
    small = z == 0.0
    with np.errstate(under="ignore"):
        found = np.where(small, tau, np.expm1(z) / np.where(small, 1.0, a))
    for order in np.unique(n[n > 0]).tolist():
        chosen = n == order
        found[chosen] = _higher(order, a[chosen], tau[chosen])
    return found


def _higher(n: int, a: ComplexArray, tau: FloatArray) -> ComplexArray:
    z = a * tau
    found = np.empty_like(z)
    tiny = np.abs(z) <= tol.SERIES_REACH
    series = np.zeros_like(z[tiny])
    for k in range(tol.SERIES_TERMS, -1, -1):
        series = series * z[tiny] / (k + 1) + 1.0 / (n + k + 1)
    found[tiny] = tau[tiny] ** (n + 1) * series
    near = ~tiny & (np.abs(z) <= tol.GAUSS_REACH)
    u = 0.5 * (1.0 + _NODES)
    found[near] = tau[near] ** (n + 1) * ((np.exp(z[near][:, None] * u) * u**n) @ (0.5 * _WEIGHTS))
    rest = ~tiny & ~near
    far, t = a[rest], tau[rest]
    with np.errstate(under="ignore"):
        end = np.exp(far * t)
    value = (end - 1.0) / far
    for k in range(1, n + 1):
        value = (t**k * end - k * value) / far
    found[rest] = value
    return found


def products(
    rates: ComplexArray, powers: NDArray[np.int64], span_s: FloatArray, one: ComplexArray, other: ComplexArray
) -> FloatArray:
    """Return ∫ Re(one·f) Re(other·f) dt over each segment, with f_a = t^q e^{rate t} / q!.

    ``one``, ``other`` shape (segments, rows, basis); ``span_s`` (segments,). Returns shape (segments, rows).
    """
    weight = 1.0 / np.array([math.factorial(int(q)) for q in powers])
    pair_power = powers[:, None] + powers[None, :]
    pair_weight = weight[:, None] * weight[None, :]
    plain = power_exponential(pair_power, rates[:, None] + rates[None, :], span_s[:, None, None]) * pair_weight
    mixed = power_exponential(pair_power, rates[:, None] + rates[None, :].conj(), span_s[:, None, None]) * pair_weight
    half = np.matmul(one, plain)
    total = np.einsum("srb,srb->sr", half, other)
    total += np.einsum("srb,srb->sr", np.matmul(one, mixed), other.conj())
    return 0.5 * total.real


def gauss_points(edges: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return points and weights of a composite Gauss-Legendre rule over panels, each (panels · points,)."""
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    return (middle[:, None] + half[:, None] * _PANEL_NODES).ravel(), (half[:, None] * _PANEL_WEIGHTS).ravel()


def transform(
    rates: ComplexArray, powers: NDArray[np.int64], span_s: FloatArray, omega: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return ∫ f_a e^{−jωt} dt and ∫ conj(f_a) e^{−jωt} dt, each shape (segments, basis, frequencies)."""
    weight = 1.0 / np.array([math.factorial(int(q)) for q in powers])
    a, q = rates[:, None], powers[:, None]
    tau = span_s[:, None, None]
    straight = power_exponential(q, a - 1j * omega, tau) * weight[:, None]
    turned = power_exponential(q, a.conj() - 1j * omega, tau) * weight[:, None]
    return straight, turned
