"""From a numbered network to its state equations."""

from __future__ import annotations

from interwind_service.network.topology import Topology
from interwind_service.response.reduction import reduce
from interwind_service.response.resolvent import resolvent
from interwind_service.response.roles import roles_of
from interwind_service.response.spectrum import all_coordinates
from interwind_service.response.state_space import StateSpace, state_space
from interwind_service.response.storage import storage_of


def model_of(topology: Topology, s0: float) -> StateSpace:
    """Return the state equations of a linear network, centred on the angular frequency s0, 1/s.

    Raises
    ------
    InvalidNetwork : the network has no unique solution.
    """
    storage = storage_of(topology, all_coordinates(topology))
    roles = roles_of(topology, at_zero=False)
    basis = reduce(storage, roles)
    return state_space(basis, lambda shift: resolvent(basis, roles, shift), s0)
