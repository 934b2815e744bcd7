"""The cycle map P, from the state at the start of a period to that at its end, and the search for P(x) = x.

Between events the flow is linear, and the laws of all devices are continuous, so the saltation factor is the identity
(Aizerman & Gantmakher 1958) and Φ is the product of the segments' exponentials. Newton's method on P(x) − x reaches
steady state in a few periods however slowly the network settles (Aprille & Trick 1972); P is continuous but kinked, so
when Newton's step does not help, plain periods are run, then only the modes that decay slowly are corrected (Shroff &
Keller 1993), and at last bursts of plain periods. What was done is said.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.smooth.smooth_network import SmoothNetwork
from interwind_service.response.switched.switched_network import Passage, SwitchedNetwork
from interwind_service.response.switched.tableau import Mode

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


@dataclass(slots=True, eq=False)
class CycleMap:
    """One period of a switched network as a map of its state; counts the periods it has run.

    ``resolution`` : the distance, over the largest |x|, below which a state and its image count as one.
    """

    network: SwitchedNetwork | SmoothNetwork
    mode: Mode
    periods: int = 0
    limit: int | None = None
    peak_j: float = 0.0
    resolution: float = tol.PERIODIC_RESIDUAL

    @property
    def spent(self) -> bool:
        """Whether the periods allowed have been run."""
        return self.limit is not None and self.periods >= self.limit

    @property
    def size(self) -> float:
        """The largest |x| met in the last period: what distances between states count against."""
        return float(np.sqrt(2.0 * self.peak_j))

    def __call__(self, x: FloatArray) -> FloatArray:
        """Return P(x)."""
        return self._run(x, monodromy=False).x

    def with_jacobian(self, x: FloatArray) -> tuple[FloatArray, FloatArray, float]:
        """Return P(x), Φ, and |P(x) − x| over the largest |x| of the period."""
        passage = self._run(x, monodromy=True)
        jacobian = np.eye(len(x)) if passage.jacobian is None else passage.jacobian
        return passage.x, jacobian, self.distance(passage.x, x)

    def distance(self, one: FloatArray, other: FloatArray) -> float:
        """Return the distance of two states over the largest |x| of the last period."""
        return float(np.linalg.norm(one - other)) / self.size if self.size > 0.0 else 0.0

    def _run(self, x: FloatArray, *, monodromy: bool) -> Passage:
        passage = self.network.run(x, self.start(x), monodromy=monodromy)
        self.mode, self.peak_j = passage.mode, passage.peak_j
        self.periods += 1
        return passage

    def start(self, x: FloatArray) -> Mode:
        """Return the modes a period from x begins with: pieces as its fluxes say, diodes as they were last."""
        fresh = self.network.start_mode(x)
        return tuple(
            now if device.state >= 0 else held
            for device, now, held in zip(self.network.tableau.devices, fresh, self.mode, strict=True)
        )


@dataclass(frozen=True, slots=True, eq=False)
class FixedPoint:
    """``x`` with |P(x) − x| / max |x| = ``residual``, whether that counts as found, by which means, and Φ there."""

    x: FloatArray
    residual: float
    found: bool
    jacobian: FloatArray
    means: tuple[str, ...] = ()
    repeats_after: int = 0

    @property
    def undetermined(self) -> FloatArray:
        """Directions that Φ leaves as they are, shape (n, d): any offset along them is a solution as well."""
        s, Vt = np.linalg.svd(np.eye(len(self.x)) - self.jacobian)[1:]
        return Vt[s <= _kept_above(s)].T

    @property
    def multipliers(self) -> ComplexArray:
        """The Floquet multipliers, largest first."""
        mu = np.linalg.eigvals(self.jacobian).astype(complex) if len(self.x) else np.zeros(0, complex)
        return mu[np.argsort(-np.abs(mu), kind="stable")]

    @property
    def uncertainty(self) -> float:
        """How far the state may lie from the one sought: the residual over the least singular value of I − Φ."""
        s = np.linalg.svd(np.eye(len(self.x)) - self.jacobian, compute_uv=False)
        return self.residual / float(np.min(s[s > _kept_above(s)], initial=1.0))


def fixed_point(cycle: CycleMap, x: FloatArray, *, affine: bool, warm_up: int, rounds: int) -> FixedPoint:
    """Search P(x) = x from ``x``: ``warm_up`` plain periods, Newton's method, and at most ``rounds`` bursts of periods.

    ``affine`` says that no device changes by itself, so that one Newton step is the answer.
    """
    means: list[str] = []
    for _ in range(0 if affine else warm_up):
        x = cycle(x)
    best = _newton(cycle, x, tol.NEWTON_REFUSALS, means)
    for _ in range(rounds):
        if best.found or affine:
            break
        means.append(f"a burst of {tol.BURST_PERIODS} plain periods")
        x = best.x
        for _ in range(tol.BURST_PERIODS):
            x = cycle(x)
        again = _newton(cycle, x, tol.BURST_REFUSALS, means)
        if again.found or again.residual < best.residual:
            best = again
    said = tuple(dict.fromkeys(means))
    repeats = 0 if best.found or affine or rounds == 0 else _repetition(cycle, best.x)
    return FixedPoint(best.x, best.residual, best.found, best.jacobian, said, repeats)


def _newton(cycle: CycleMap, x: FloatArray, refusals: int, means: list[str]) -> FixedPoint:
    end, phi, residual = cycle.with_jacobian(x)
    best = FixedPoint(x, residual, False, phi)
    partial, close = False, max(cycle.resolution, tol.PERIODIC_STAGNATION)
    for _ in range(tol.NEWTON_STEPS):
        if residual <= cycle.resolution:
            return FixedPoint(x, residual, True, phi)
        if refusals < 0 or cycle.spent:
            break
        step = _slow_step(phi, end - x) if partial else full_step(phi, end - x)
        accepted = False
        factor = 1.0
        for _ in range(tol.LINE_SEARCH_TRIALS):
            if cycle.spent:
                break
            trial = x + factor * step
            trial_end, trial_phi, trial_residual = cycle.with_jacobian(trial)
            if trial_residual < tol.LINE_SEARCH_DECREASE * residual:
                accepted = True
                break
            factor *= tol.LINE_SEARCH_FACTOR
        if accepted:
            x, end, phi, residual = trial, trial_end, trial_phi, trial_residual
            if partial:
                means.append("correction of the slow modes only")
            partial = False
        elif residual <= close:
            return FixedPoint(x, residual, True, phi)
        else:
            refusals -= 1
            means.append("plain periods where Newton's step did not help")
            for _ in range(tol.PLAIN_PERIODS):
                x = end
                end, phi, residual = cycle.with_jacobian(x)
            partial = not partial
        if residual < best.residual:
            best = FixedPoint(x, residual, False, phi)
    found = best.residual <= close
    return FixedPoint(best.x, best.residual, found, best.jacobian)


def _kept_above(singular: FloatArray) -> float:
    return tol.UNDETERMINED_OFFSET * max(1.0, float(singular.max(initial=0.0)))


def full_step(phi: FloatArray, miss: FloatArray) -> FloatArray:
    """Return (I − Φ)⁺ (P(x) − x); singular directions are left as they are."""
    U, s, Vt = np.linalg.svd(np.eye(len(phi)) - phi)
    kept = s > _kept_above(s)
    step: FloatArray = Vt[kept].T @ ((U.T[kept] @ miss) / s[kept])
    return step


def _slow_step(phi: FloatArray, miss: FloatArray) -> FloatArray:
    """Return Newton's step in the modes |μ| > ½ and the plain period in the others."""
    mu, V = np.linalg.eig(phi)
    coefficient = np.linalg.lstsq(V, miss.astype(complex), rcond=None)[0]
    slow = (np.abs(mu) > tol.SLOW_MULTIPLIER) & (np.abs(1.0 - mu) > tol.UNDETERMINED_OFFSET)
    factor = np.where(slow, 1.0 / np.where(slow, 1.0 - mu, 1.0), 1.0)
    return (V @ (factor * coefficient)).real


def _repetition(cycle: CycleMap, x: FloatArray) -> int:
    """Return after how many periods the run repeats itself, 0 when after none that was looked for."""
    for _ in range(tol.BURST_PERIODS):
        x = cycle(x)
    states = [x]
    for _ in range(2 * tol.LONGEST_REPETITION):
        states.append(cycle(states[-1]))
    for multiple in range(2, tol.LONGEST_REPETITION + 1):
        spread = max(cycle.distance(states[k + multiple], states[k]) for k in range(len(states) - multiple))
        if spread < tol.REPETITION_SPREAD:
            return multiple
    return 0
