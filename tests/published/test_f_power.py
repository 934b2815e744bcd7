"""Power of coupled windings with their full resistance matrix, through the public client."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw


@pytest.mark.parametrize(("cross", "watt"), [(0.082, 1.9664), (0.0, 9.8384)])
def test_loss_with_cross_resistance(solver, cross, watt):
    """R = [1, 0.82; 0.82, 1.05] x 0.1 Ω at 10 and −9.6 A peak: 1.97 W, by its diagonal 9.84 W (derived: ½ iᵀ R i)."""
    R = np.array([[0.1, cross], [cross, 0.105]])
    coils = iw.WindingSet(("p", "s"), [[1e-3, 0.9e-3], [0.9e-3, 1e-3]], R)
    net = iw.Network(
        "0",
        [
            iw.CurrentSource("Ip", "0", "a", phasor=10.0),
            iw.CurrentSource("Is", "0", "b", phasor=-9.6),
            iw.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")}),
        ],
    )
    for hertz in (50.0, 1e6):
        power = solver.frequency_response(
            net, [hertz], [iw.ElementPower("T"), iw.ElementPower("Ip"), iw.ElementPower("Is")]
        )
        assert power.samples[0, 0].real == pytest.approx(watt, rel=1e-9)
        assert power.samples[0].sum() == pytest.approx(0.0, abs=1e-9 * abs(power.samples[0]).max())
