"""The DC point of the sources at t = 0: no voltage across inductors, no current through capacitors.

    M s = N x + F w,    P s = 0,    i_b = i(v_b) on every branch with a law

Ideal devices are found by complementarity. Smooth laws are solved by Newton's method on the whole tableau; along a
tangent that overshoots, a law is entered by the current the tangent gives and not by its voltage. Where that does not
settle, the sources are raised from 0 step by step (continuation: Ortega & Rheinboldt 1970, section 7.5, from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.nonlinear_laws import Laws, laws_of
from interwind_service.response.switched.switched_network import SwitchedNetwork
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def residual_state(tableau: Tableau) -> FloatArray:
    """Return the state with everything at 0 but the residual fluxes."""
    x = np.zeros(tableau.states)
    for device in tableau.devices:
        if isinstance(device, SaturableBranch):
            x[device.state] = device.residual_wb / device.root
    return x


class _Rest:
    """The equations of rest over z = (s, x) in one combination of device modes; rows scaled to a largest entry of 1."""

    def __init__(self, tableau: Tableau, mode: Mode, w: ComplexArray) -> None:
        M, N, F = tableau.with_modes(mode)
        size, states = tableau.unknowns, tableau.states
        self.K = np.zeros((size + states, size + states))
        self.K[:size, :size], self.K[:size, size:], self.K[size:, :size] = M, -N, tableau.P
        self.right = np.concatenate([(F @ w).real, np.zeros(states)])
        self.x = residual_state(tableau)

    def solve(self, share: float = 1.0) -> FloatArray:
        """Return z under a share of the sources; what rest leaves open (a charge, a flux) stays as it was.

        The answer is the one next to the signals that the first states have, whether these are at rest or not.
        """
        row = np.abs(self.K).max(axis=1)
        row[row == 0.0] = 1.0  # an element with both ends on one node asks nothing
        K, right = self.K / row[:, None], share * self.right / row
        size = len(K) - len(self.x)
        signals = np.linalg.lstsq(K[:size, :size], right[:size] - K[:size, size:] @ self.x, rcond=tol.REST_RANK)[0]
        z = np.concatenate([signals, self.x])
        for _ in range(2):  # the second takes away the rounding of the first signals, which may be large
            z = z + np.linalg.lstsq(K, right - K @ z, rcond=tol.REST_RANK)[0]
        return z

    def require(self, z: FloatArray) -> None:
        """Refuse z that misses the equations: then there is no point of rest."""
        row = np.abs(self.K).max(axis=1)
        row[row == 0.0] = 1.0
        gap = float(np.abs((self.K @ z - self.right) / row).max(initial=0.0))
        size = max(float(np.abs(z).max(initial=0.0)), float(np.abs(self.right / row).max(initial=0.0)))
        if gap > tol.REST_GAP * size:
            raise InvalidNetwork.at(
                "initial",
                "SteadyStart found, but the sources at 0 leave no point of rest (the equations are missed by "
                f"{gap / size:.3g}): a voltage stands across inductors alone or a current flows into capacitors alone; "
                "state the initial values instead",
                reason="NO_POINT_OF_REST",
            )


def switched_rest(network: SwitchedNetwork) -> FloatArray:
    """Return x of the point of rest, the ideal devices found with it.

    Raises
    ------
    InvalidNetwork : there is none, or none was found.
    """
    tableau = network.tableau
    w = tableau.drives.state(0.0)
    mode = _first_mode(network)
    for _ in range(tol.PIVOTS):
        equations = _Rest(tableau, mode, w)
        z = equations.solve()
        x = z[tableau.unknowns :]
        following = tuple(
            device.mode_at(device.root * x[device.state]) if isinstance(device, SaturableBranch) else own
            for device, own in zip(tableau.devices, network.consistent(mode, x, w), strict=True)
        )
        if following == mode:
            equations.require(z)
            return x
        mode = following
    raise _not_found("the states of the ideal devices do not settle")


def smooth_rest(network: SwitchedNetwork) -> FloatArray:
    """Return x of the point of rest under the laws, its equations verified.

    Raises
    ------
    InvalidNetwork : there is none, or none was found.
    """
    tableau = network.tableau
    laws = laws_of(tableau.topology, tableau.devices, 1.0 / tableau.limit.open_ohm)
    equations = _Rest(tableau, _first_mode(network), tableau.drives.state(0.0))
    newton = _Newton(equations, tableau, laws)
    argument, reached, step = newton.argument[:, tableau.unknowns :] @ equations.x, 0.0, 1.0
    while reached < 1.0:
        share = min(1.0, reached + step)
        found, settled = newton.search(argument, share)
        if settled:
            argument, reached, step = found, share, tol.REST_RAISE * step
            continue
        step /= tol.REST_LOWER
        if step < tol.REST_LEAST:
            raise _not_found(f"the laws do not settle beyond {reached:.3g} of the sources")
    z = newton.solve(argument, 1.0)
    equations.require(z)
    _refuse_leak(tableau, laws, newton.argument @ z, z)
    return z[tableau.unknowns :]


def _refuse_leak(tableau: Tableau, laws: Laws, argument: FloatArray, z: FloatArray) -> None:
    """Refuse a point at which a current source has no way but the leak that stands for perfect blocking."""
    leak_a = laws.leak_s * np.abs(argument[laws.exponential])
    imposed = np.abs(z[tableau.column_of_current[tableau.topology.of_kind(Kind.CURRENT_SOURCE)]]).max(initial=0.0)
    if imposed > 0.0 and leak_a.max(initial=0.0) > tol.REST_LEAK * imposed:
        branch = int(laws.branch[laws.exponential[leak_a.argmax()]])
        raise _not_found(f"a current source has no way but through {tableau.topology.names[branch]!r}, which blocks")


class _Newton:
    """Newton's method for the arguments of the laws: branch voltages, and fluxes of saturable branches."""

    def __init__(self, equations: _Rest, tableau: Tableau, laws: Laws) -> None:
        self.equations, self.laws = equations, laws
        self.rows = tableau.row_of_branch[laws.branch]
        flux = {d.branch: d for d in tableau.devices if isinstance(d, SaturableBranch)}
        self.argument = np.zeros((len(laws.branch), len(equations.K)))
        self.current = np.zeros_like(self.argument)
        for k, branch in enumerate(laws.branch.tolist()):
            self.current[k, tableau.column_of_current[branch]] = 1.0
            if branch in flux:
                self.argument[k, tableau.unknowns + flux[branch].state] = flux[branch].root
            else:
                self.argument[k, : tableau.unknowns] = tableau.branch_voltage_row(branch)

    def solve(self, argument: FloatArray, share: float) -> FloatArray:
        """Return z with the laws replaced by their tangents."""
        i, slope = self.laws.currents(argument)
        self.equations.K[self.rows] = self.current - slope[:, None] * self.argument
        self.equations.right[self.rows] = (i - slope * argument) / share
        return self.equations.solve(share)

    def search(self, argument: FloatArray, share: float) -> tuple[FloatArray, bool]:
        """Return the arguments after Newton's steps, and whether they settled."""
        for _ in range(tol.REST_STEPS):
            z = self.solve(argument, share)
            wanted = self.argument @ z
            following = self.laws.limited(argument, wanted)
            moved = np.abs(wanted - argument).max(initial=0.0)
            argument = following
            if moved <= tol.REST_SETTLED * np.abs(wanted).max(initial=0.0):
                return argument, True
        return argument, False


def _first_mode(network: SwitchedNetwork) -> Mode:
    x = residual_state(network.tableau)
    return network.mode_at(network.start_mode(x), 0.0, float(network.breakpoint_s[1]))


def _not_found(why: str) -> InvalidNetwork:
    return InvalidNetwork.at(
        "initial",
        f"no state of rest was found: {why}; start from stated values instead of SteadyStart",
        reason="NO_POINT_OF_REST",
    )
