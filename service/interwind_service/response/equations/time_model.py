"""From a numbered network to its state equations."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from interwind.errors import AccuracyNotReached
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import all_coordinates
from interwind_service.response.equations.descriptor import descriptor_basis
from interwind_service.response.equations.reduction import reduce
from interwind_service.response.equations.resolvent import Resolvent, resolvent
from interwind_service.response.equations.roles import roles_of
from interwind_service.response.equations.state_space import StateSpace, state_space
from interwind_service.response.equations.storage import storage_of


def model_of(topology: Topology, s0: float) -> StateSpace:
    """Return the state equations of a linear network, centred on the angular frequency s0, 1/s.

    Raises
    ------
    InvalidNetwork : the network has no unique solution.
    AccuracyNotReached : the numerical reduction of controlled sources misses direct solves, or the element values are
        beyond what arithmetic can hold together.
    """
    try:
        return _model(topology, s0)
    except np.linalg.LinAlgError as error:
        raise AccuracyNotReached(
            "the element values are too far apart for arithmetic to hold them together; bring them closer, or leave "
            "out what is negligible",
            reason="OUT_OF_NUMBERS",
        ) from error


def _model(topology: Topology, s0: float) -> StateSpace:
    storage = storage_of(topology, all_coordinates(topology))
    roles = roles_of(topology, at_zero=False)
    if not topology.controls:
        basis = reduce(storage, roles)
        return state_space(basis, lambda shift: resolvent(basis, roles, shift), s0)
    reduced = descriptor_basis(storage, roles, s0)

    def resolvent_at(shift: float) -> Resolvent:
        return resolvent(reduced, roles, shift)

    space = state_space(reduced, resolvent_at, s0)
    _verify(space, resolvent_at)
    return space


def _verify(space: StateSpace, resolvent_at: Callable[[float], Resolvent]) -> None:
    """Hold C (s − A)⁻¹ B + D + s Y1 against direct solves on the real axis, voltages and currents each by size."""
    identity = np.eye(space.states)
    rest = space.C @ np.linalg.solve(space.shift * identity - space.A, space.B)
    direct_part = space.gain_at_shift - rest
    for ratio in tol.DESCRIPTOR_PROOFS:
        s = space.shift * ratio
        direct = resolvent_at(s).y
        model = space.C @ np.linalg.solve(s * identity - space.A, space.B) + direct_part + s * space.Y1
        branches = len(space.basis.voltage_impulse)
        for kind in (slice(0, branches), slice(branches, 2 * branches)):
            size = float(np.abs(direct[kind]).max(initial=0.0))
            gap = float(np.abs(model[kind] - direct[kind]).max(initial=0.0))
            if gap > tol.DESCRIPTOR_ROUNDING * size:
                raise AccuracyNotReached(
                    f"the equations reduced around the controlled sources miss a direct solve at s = {s:.3g} 1/s by "
                    f"{gap / size:.1e}; at most {tol.DESCRIPTOR_ROUNDING:.0e} is allowed; bring the values of the "
                    "elements closer together"
                )
