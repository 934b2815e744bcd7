"""Every value comes back from its message and from its JSON text as it went."""

from __future__ import annotations

import dataclasses
import json

import numpy as np
import pytest

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind.codec.stream import NamedArray, decode_stream, encode_stream
from interwind.model.digest import request_digest
from interwind.v1 import response_service_pb2

PAIR = iw.WindingSet(
    labels=("drive", "rail"),
    inductance_h=[[1.0e-3, np.nan], [0.23e-3, 60e-6]],
    resistance_ohm=[[0.6, 0.01], [0.01, 0.03]],
    inductance_uncertainty_h=[[1e-6, 2e-6], [2e-6, 3e-6]],
)
SETS = [
    PAIR,
    iw.WindingSet.from_coupling(("a", "b"), [1e-3, 2e-3], [[1, -0.5], [-0.5, 1]], [0.1, 0.2], coupling_decimals=3),
    iw.WindingSet.from_coupling(("a", "b"), [1e-3, 2e-3], [[1, np.nan], [np.nan, 1]], coupling_uncertainty=0.01),
]
WAVEFORMS = [
    iw.Constant(1.0),
    iw.Step(2.0, 1e-6),
    iw.Ramp(3.0, 1e-6),
    iw.Sine(1.0, 50.0, 0.1, 0.2),
    iw.Trapezoid(low=0.0, high=5.0, period_s=1e-5, rise_s=1e-7, high_s=4e-6, fall_s=1e-7, delay_s=1e-6),
    iw.DoubleExponential(1.0, 68e-6, 0.4e-6),
    iw.PiecewiseLinear([0.0, 1.0, 1.0], [0.0, 1.0, 2.0]),
    iw.StandardImpulse(iw.ImpulseShape.LIGHTNING_1_2_50, 1.0, 3e-6, 1e-7),
    iw.StandardImpulse(iw.ImpulseShape.RING_100_KHZ, 1.0),
    iw.DampedSine(1.0, 1e5, 1e-5, 0.3),
    iw.OffsetFaultCurrent(1.0, 50.0, 0.05),
    iw.SampledRecord(1e-6, [0.0, 1.0, 0.5], 2e-6),
]
ELEMENTS = [
    iw.Resistor("r", "a", "g", 5.0),
    iw.Inductor("l", "a", "g", 1e-3),
    iw.Capacitor("c", "a", "g", 1e-9),
    iw.VoltageSource("v0", "a", "g"),
    iw.VoltageSource("v1", "a", "g", phasor=1 + 2j),
    iw.Windings("T", SETS[1], {"a": ("a", "g"), "b": ("g", "x")}),
    iw.Switch("s1", "a", "g", iw.Gate(1e-3, 1e-4, 1e-5), 0.1),
    iw.Switch("s2", "a", "g", iw.GateTimes([1e-3, 2e-3], True), 0.1, 1e6),
    iw.Diode("d1", "a", "g"),
    iw.Diode("d2", "a", "g", 0.7, 0.01, 1e6),
    iw.Diode("d3", "a", "g", saturation_current_a=1e-12, thermal_voltage_v=0.026),
    iw.Arrester("z", "a", "g", 1e3, 1e-3, 30.0),
    iw.SaturableInductor("m", "a", "g", [1e-3, 1.0], [1.0, 1.1], 0.5),
    iw.IdealTransformer("it", "a", "g", "x", "g", -2.0),
    iw.VoltageByVoltage("e", "p", "g", ("a", "x"), 3.0),
    iw.CurrentByVoltage("gm", "a", "g", ("a", "x"), 1e-3),
    iw.VoltageByCurrent("h", "q", "g", "v0", 10.0),
    iw.CurrentByCurrent("f", "a", "g", "v0", 2.0),
    *[iw.CurrentSource(f"i{n}", "a", "g", waveform) for n, waveform in enumerate(WAVEFORMS)],
]
NETWORK = iw.Network("g", ELEMENTS, [iw.Port("in", "a", "g", 75.0)], ["x"])
OBSERVE = (
    iw.NodeVoltage("a"), iw.NodeVoltage("a", "x"), iw.ElementVoltage("r"), iw.ElementCurrent("r"),
    iw.WindingVoltage("T", "a"), iw.WindingCurrent("T", "b"), iw.FluxLinkage("T", "a"), iw.ElementPower("r"),
    iw.StoredEnergy("T"),
)  # fmt: skip
READINGS = (
    iw.OpenInductance("a", 1e-3, 1e-6, iw.ReadingContext(1e4, iw.ReadingForm.PARALLEL, 20.0, 60e-12)),
    iw.ShortedInductance("a", ("b",), 1e-5, 1e-8, iw.ReadingContext(1e5, shorted_resistance_ohm=(0.02,))),
    iw.SeriesInductance(("a", "b"), False, 1e-3, 1e-6),
    iw.VoltageRatio("a", "b", 0.5, 1e-3),
    iw.MutualInductance(("a", "b"), 5e-4, 1e-6),
    iw.PairLeakage(("a", "b"), (10.0, 5.0), 1e-5, 1e-7),
    iw.EffectiveLeakage("a", ("a", "b"), 1e-5, 1e-7),
    iw.InverseInductance(("a", "a"), 1e4, 10.0),
)


def same(first, second) -> bool:
    """Whether two values hold the same numbers and texts: their fingerprints agree."""
    return request_digest("", {"value": first}) == request_digest("", {"value": second})


@pytest.mark.parametrize("windings", SETS, ids=["matrix", "coupling", "unknown"])
def test_winding_sets_come_back_from_json(windings):
    """The form its owner stated, every uncertainty and every unknown pair survive."""
    back = iw.WindingSet.from_json(windings.to_json())

    assert same(back, windings)
    assert back.stated_as_coupling == windings.stated_as_coupling


def test_networks_come_back_from_json():
    """Every element and every waveform survives."""
    back = iw.Network.from_json(NETWORK.to_json())

    assert same(back, NETWORK)
    kinds = {next(key for key in element if key != "name") for element in json.loads(NETWORK.to_json())["elements"]}
    assert len(kinds) == 15


PLACES = ("in", iw.Differential("in", "out"), iw.Common("in", "out"))
LINK = iw.LinkEfficiency(("in",), ("out", "third"))
FIGURES = (
    iw.Scattering(PLACES[1], PLACES[2]), iw.InsertionLoss(PLACES[0], PLACES[1], 0.1, 100.0),
    iw.VoltageTransfer(*PLACES[:2]), iw.CurrentTransfer(*PLACES[:2]), iw.InputImpedance(PLACES[1]),
    iw.InputAngle(PLACES[0]), LINK, iw.OptimumLoad(LINK, "third"), iw.OptimumDrive(LINK, "in"),
)  # fmt: skip
REQUESTS = {
    "check": {"windings": PAIR},
    "repair": {
        "windings": SETS[1], "trusted": (("a", "b"),), "weights": np.array([1.0, 2.0]), "floor": 1e-3,
        "method": iw.RepairMethod.NEAREST,
    },
    "identify": {"labels": ("a", "b"), "readings": READINGS},
    "characterize": {
        "windings": SETS[1],
        "connections": (iw.InSeries("s", ("a", "b"), (True, False)), iw.InParallel("p", ("a", "b")), iw.Shorted("a"),
                        iw.Open("b")),
        "frequency_hz": np.array([1e3, 1e4]),
    },
    "stamp": {"network": NETWORK},
    "frequency_response": {"network": NETWORK, "frequency_hz": np.array([1.0, 2.0]), "observe": OBSERVE},
    "poles": {"network": NETWORK, "observe": OBSERVE, "around_hz": 1e5},
    "port_response": {"network": NETWORK, "frequency_hz": np.array([1.0, 2.0])},
    "port_figures": {"network": NETWORK, "frequency_hz": np.array([1.0, 2.0]), "figures": FIGURES},
    "time_response": {
        "network": NETWORK, "stop_s": 1.0, "step_s": 0.1, "observe": OBSERVE,
        "initial": {iw.WindingCurrent("T", "a"): 1.0, iw.ElementVoltage("c"): 2.0}, "tolerance": 1e-5,
        "recording": iw.Recording(0.1, 0.9, 3, envelope=True),
    },
    "periodic_response": {"network": NETWORK, "period_s": 1.0, "step_s": 0.1, "observe": None, "tolerance": 1e-5},
}  # fmt: skip


@pytest.mark.parametrize("engine", sorted(BY_ENGINE))
def test_requests_come_back(engine):
    """What the client puts in is what the engine function gets, and the size header tells how large it is."""
    call = BY_ENGINE[engine]
    message = call.encode_request(**REQUESTS[engine])

    arguments = call.decode(call.request_class.FromString(message.SerializeToString()))

    assert {name: same(arguments[name], value) for name, value in REQUESTS[engine].items()} == dict.fromkeys(
        REQUESTS[engine], True
    )
    assert message.size.winding_count == 2


def test_adaptive_sweeps_and_steady_starts_come_back():
    """The alternatives of a list of frequencies and of given states survive."""
    frequency, time = BY_ENGINE["frequency_response"], BY_ENGINE["time_response"]
    sweep = iw.AdaptiveSweep(1.0, 1e6, 0.1)

    assert frequency.decode(frequency.encode_request(network=NETWORK, frequency_hz=sweep))["frequency_hz"] == sweep
    request = time.encode_request(network=NETWORK, stop_s=1.0, step_s=0.5, initial=iw.SteadyStart())
    assert time.decode(request)["initial"] == iw.SteadyStart()


def _noticed():
    return {
        "findings": (iw.Finding("CODE", iw.Severity.WARNING, ("a",), "coupling[0][1]", "words", 1.0, 2.0),),
        "cautions": (iw.Caution("CODE", "words", 1.0, 2.0),),
        "evidence": iw.Evidence("LU", 1e-16, 10.0, 0.0, 1e-3, 1e-12, 3, "ab" * 32, "1.2"),
    }


def _answers():
    rng = np.random.default_rng(5)
    matrix, vector = rng.normal(size=(2, 2)), rng.normal(size=2)
    noticed = _noticed()
    yield "check", iw.ValidityReport(
        iw.Verdict.INVALID, ("a", "b"), vector, vector, vector, -1.0, (iw.Culprit(("a", "b"), 0.1, 0.2, 0.15),),
        matrix, matrix, margin=0.1, impossible_subsets=(("a", "b"),), blame=vector, **noticed,
    )  # fmt: skip
    yield (
        "repair",
        iw.RepairReport(
            SETS[1], 0.1, (iw.Change(("a", "b"), np.nan, 0.5, 2.0),), matrix, matrix, vector, vector, **noticed
        ),
    )
    yield (
        "identify",
        iw.Identification(
            SETS[1], np.eye(3), 1.5, 2, vector, (iw.Outlier(1, ("a",), 5.0),), READINGS[1], matrix, matrix, **noticed
        ),
    )
    yield "characterize", iw.Characterization(
        SETS[1], matrix, matrix, vector, vector, matrix, iw.Modes(vector, matrix, matrix, vector, matrix),
        (iw.EquivalentCircuit(iw.EquivalentKind.T, "a", vector, (iw.EquivalentBranch((), np.inf),), matrix),),
        (iw.CurrentSharing("p", ("a", "b"), vector, matrix + 1j, vector, vector),), **noticed,
    )  # fmt: skip
    yield "stamp", iw.MnaSystem(matrix, matrix, matrix, OBSERVE[:2], ("v0", "v1"), **noticed)
    yield "frequency_response", iw.FrequencyResponse(OBSERVE[:2], matrix + 1j, frequency_hz=vector, **noticed)
    pole = vector - 1.0 + 1j
    yield (
        "poles",
        iw.PoleReport(
            pole, vector, vector, OBSERVE[:2], matrix + 1j, (pole, pole[:0]), (("T", "a"), ("c", "")), matrix, **noticed
        ),
    )
    tensor = rng.normal(size=(2, 1, 1)) + 1j
    yield "port_figures", iw.PortFigures(FIGURES[:2], vector, matrix + 1j, **noticed)
    yield "port_response", iw.PortResponse(("in",), vector, tensor, tensor, tensor, **noticed)
    events = (iw.Event(1e-3, "s1", "open"),)
    ledger = iw.EnergyLedger(1.0, 0.5, 0.4, 0.1, 0.0, {"r": 0.5})
    figures = iw.RecordFigures(vector, vector, vector, vector)
    yield "time_response", iw.TimeResponse(
        OBSERVE[:2], matrix, time_s=vector, events=events, ledger=ledger, figures=figures, lowest=matrix,
        highest=matrix, **noticed,
    )  # fmt: skip
    yield "periodic_response", iw.PeriodicResponse(
        OBSERVE[:2], matrix, period_s=1e-3, time_s=vector, means=vector, rmses=vector, peaks=vector,
        peak_times_s=vector, harmonic_values=matrix + 1j, multipliers=vector + 1j, mean_power_w={"r": 1.0},
        events=events, ledger=ledger, **noticed,
    )  # fmt: skip


@pytest.mark.parametrize(
    ("engine", "answer"), list(_answers()), ids=lambda value: value if isinstance(value, str) else ""
)
def test_answers_come_back(engine, answer):
    """What the engine answers is what the client returns, field by field."""
    call = BY_ENGINE[engine]
    messages = [call.response_class.FromString(message.SerializeToString()) for message in call.encode(answer)]

    back = call.decode_response(messages)

    assert type(back) is type(answer)
    unequal = [f.name for f in dataclasses.fields(answer) if not same(getattr(back, f.name), getattr(answer, f.name))]
    assert unequal == []


def test_streams_are_cut_and_proven():
    """No chunk is above 1 MiB, progress is told, and a lost or changed byte is DataLoss."""
    array = np.random.default_rng(6).normal(size=(200_000, 3))
    part = response_service_pb2.ComputeTimeResponseResponse
    value = iw.TimeResponse(OBSERVE[:3], array, time_s=array[:, 0], **_noticed())
    messages = [
        part.FromString(m.SerializeToString()) for m in encode_stream(part, [NamedArray("samples", array)], value)
    ]

    assert max(message.ByteSize() for message in messages) < 1_049_000
    assert np.array_equal(decode_stream(messages).arrays["samples"], array)
    for damaged in (messages[:-1], messages[:2] + messages[3:], [messages[0], *messages[2:]]):
        with pytest.raises(iw.DataLoss):
            decode_stream(damaged)
    flipped = part.FromString(messages[1].SerializeToString())
    flipped.chunk.data = b"\1" + flipped.chunk.data[1:]
    with pytest.raises(iw.DataLoss):
        decode_stream([messages[0], flipped, *messages[2:]])


@pytest.mark.parametrize(
    ("text", "field"),
    [
        ('{"reference": "g", "elements": [{"name": "r", "resistor": {"a": "x"}}]}', "elements[0].b"),
        ('{"reference": "g", "elements": [{"name": "r"}]}', "elements[0].kind"),
        ('{"reference": "g", "elements": [{"name": "s", "switch": {"a": "x", "b": "g"}}]}', "elements[0].closed"),
        ('{"reference": "g", "elements": [{"name": "T", "windings": {"windings": {"labels": ["a"]}}}]}',
         "elements[0].windings.inductance_h"),
        ('{"reference": "g"}', "elements"),
        ('{"reference": 3, "nonsense": 1}', "json"),
        ('{"reference": "g", "elements": [{"name": "v", "voltage_source": {"a": "x", "b": "g", "waveform": {}}}]}',
         "elements[0].waveform.shape"),
    ],
)  # fmt: skip
def test_paths_of_what_does_not_fit(text, field):
    """The error names the field by its path in the request."""
    with pytest.raises(iw.InvalidRequest) as caught:
        iw.Network.from_json(text)

    assert caught.value.violations[0].field == field
