"""Requests over time that cannot be meant: refused by type, with the field, the values and what clashes, at once."""

from __future__ import annotations

import time

import grpc
import pytest

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind.codec.errors import from_rpc_error
from interwind.codec.observable import observable_to_message
from interwind.v1 import batch_service_pb2

from .test_random_requests import family_bytes

REFUSAL_S = 2.0
REFUSAL_BYTES = 16 << 20
TIME = BY_ENGINE["time_response"]
COIL = iw.Windings("T", iw.WindingSet(("w",), [[1e-3]], 0.1), {"w": ("x", "g")})
SWITCH = iw.Switch("S", "in", "x", iw.Gate(1e-5, 4e-6))


def network(*more: iw.Element) -> iw.Network:
    return iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Resistor("R", "in", "x", 5.0),
            iw.Inductor("L", "x", "o", 1e-4),
            iw.Capacitor("C", "o", "g", 1e-6),
            COIL,
            *more,
        ],
    )


@pytest.fixture(scope="module")
def solver():
    with iw.connect(retries=0) as client:
        for net in (network(), network(SWITCH)):  # whatever is loaded once is loaded
            client.time_response(net, 1e-5, 1e-6)
        client.periodic_response(network(SWITCH), 1e-5, 1e-6)
        yield client


def stating(net: iw.Network, *values: tuple[iw.Observable, float]):
    """The request of a run that lists its initial states one by one, as the wire lets anybody do."""
    message = TIME.encode_request(network=net, stop_s=1e-5, step_s=1e-6)
    for observable, value in values:
        message.initial.add(observable=observable_to_message(observable), value=value)
    return message


def send(client: iw.Client, message) -> iw.TimeResponse:
    with grpc.insecure_channel(client.address, options=[("grpc.enable_http_proxy", 0)]) as channel:
        stream = channel.unary_stream(TIME.path, response_deserializer=TIME.response_class.FromString)
        try:
            return TIME.decode_response(stream(message.SerializeToString(), timeout=20.0))
        except grpc.RpcError as error:
            raise from_rpc_error(error) from None


@pytest.mark.parametrize("net", [network(), network(SWITCH)], ids=["linear", "switched"])
@pytest.mark.parametrize(
    ("one", "other"),
    [
        (iw.ElementCurrent("L"), iw.ElementCurrent("L")),
        (iw.ElementVoltage("C"), iw.ElementVoltage("C")),
        (iw.WindingCurrent("T", "w"), iw.WindingCurrent("T", "w")),
        (iw.WindingCurrent("T", "w"), iw.ElementCurrent("T")),
    ],
    ids=["inductor", "capacitor", "winding", "winding by two names"],
)
def test_one_state_with_two_values_is_refused(solver, net, one, other):
    """Repeated on the wire or told by another name: both values, how far apart, and the entry at fault."""
    with pytest.raises(iw.InvalidRequest) as caught:
        send(solver, stating(net, (one, 1.0), (other, 1.5)))
    (violation,) = caught.value.violations
    assert caught.value.reason == "CONTRADICTORY_START"
    assert violation.field == "initial[1]"
    for told in ("1.5 found", "initial[0]", "1.0", "0.5 apart"):
        assert told in violation.description


def test_one_state_told_twice_alike_is_no_contradiction(solver):
    current = iw.WindingCurrent("T", "w")
    answer = send(solver, stating(network(), (current, 1.0), (iw.ElementCurrent("T"), 1.0), (current, 1.0)))
    assert answer[current][0] == pytest.approx(1.0)


def test_a_batch_is_refused_as_a_single_run_is(solver):
    message = batch_service_pb2.SubmitBatchRequest(network=stating(network()).network)
    message.time.stop_s, message.time.step_s = 1e-5, 1e-6
    for value in (1.0, 1.5):
        message.time.initial.add(observable=observable_to_message(iw.ElementVoltage("C")), value=value)
    with grpc.insecure_channel(solver.address, options=[("grpc.enable_http_proxy", 0)]) as channel:
        call = channel.unary_unary("/interwind.v1.BatchService/SubmitBatch")
        with pytest.raises(grpc.RpcError) as caught:
            call(message.SerializeToString(), timeout=20.0)
    (violation,) = from_rpc_error(caught.value).violations
    assert violation.field == "time.initial[1]"
    assert "0.5 apart" in violation.description


@pytest.mark.parametrize("more", [(), (SWITCH,)], ids=["linear", "switched"])
def test_a_start_that_does_not_fit_is_made_consistent_and_told(solver, more):
    """4 V stated across a capacitor that a source of 10 V holds: charge flows at once, ½ C ΔV² = 18 uJ is lost."""
    held = iw.Capacitor("held", "in", "g", 1e-6)
    voltage = iw.ElementVoltage("held")
    answer = solver.time_response(network(held, *more), 1e-5, 1e-6, [voltage], initial={voltage: 4.0})
    finding = next(found for found in answer.findings if found.code == "INCONSISTENT_START")
    assert "held from 4 to 10 V" in finding.message
    assert finding.measured == pytest.approx(18e-6, rel=1e-6)
    assert answer[voltage] == pytest.approx(10.0, rel=1e-8)
    assert answer.ledger.lost_in_jumps_j == pytest.approx(18e-6, rel=1e-4)


@pytest.mark.parametrize("more", [(), (SWITCH,)], ids=["linear", "switched"])
def test_a_recording_is_admitted_by_what_it_keeps(solver, more):
    """10¹² steps are refused for their number even if few are kept; memory is forecast from what is kept."""
    thin = iw.Recording(every=10**9)
    with pytest.raises(iw.InvalidRequest) as caught:
        solver.time_response(network(*more), 1.0, 1e-12, recording=thin)
    (violation,) = caught.value.violations
    assert violation.field == "step_s"
    assert "1e+12 steps found" in violation.description
    size = TIME.encode_request(network=network(*more), stop_s=1.0, step_s=1e-8, recording=iw.Recording(0.5, None, 1000))
    assert size.size.point_count == pytest.approx(50_001, abs=1)


SHORTED = iw.Network(
    "g",
    [
        iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
        iw.Switch("upper", "in", "x", iw.GateTimes([], initially_closed=True)),
        iw.Switch("lower", "x", "g", iw.GateTimes([], initially_closed=True)),
        iw.Switch("aside", "x", "y", iw.GateTimes([], initially_closed=True)),
        iw.Resistor("R", "y", "g", 5.0),
    ],
)


@pytest.mark.parametrize(
    ("call", "net", "numbers", "field", "told"),
    [
        ("time_response", network(SWITCH), (1e-5, 0.0), "step_s", "0.0 s found"),
        ("time_response", network(), (1e-5, 0.0), "step_s", "0.0 s found"),
        ("time_response", network(SWITCH), (1.0, 1e-12), "size", "ask for fewer points"),
        ("time_response", network(), (1.0, 1e-12), "size", "ask for fewer points"),
        ("periodic_response", network(SWITCH), (1e-5, 0.0), "step_s", "0.0 s found"),
        ("periodic_response", network(SWITCH), (1e-5, 1e-17), "size", "ask for fewer points"),
        ("periodic_response", network(SWITCH), (1.5e-5, 1e-6), "period_s", "'S'"),
        ("time_response", SHORTED, (1e-5, 1e-6), "elements", "'E' is shorted"),
        ("periodic_response", SHORTED, (1e-5, 1e-6), "elements", "'E' is shorted"),
    ],
)
def test_what_cannot_be_meant_is_refused_before_memory_is_taken(solver, call, net, numbers, field, told):
    """Steps of no length, 10¹² steps, a period that is none of the drives', a source shorted by closed switches."""
    before, started = family_bytes(solver._embedded.pid), time.monotonic()
    with pytest.raises(iw.InvalidRequest) as caught:
        getattr(solver, call)(net, *numbers)
    assert time.monotonic() - started < REFUSAL_S
    assert family_bytes(solver._embedded.pid) - before < REFUSAL_BYTES
    (violation,) = caught.value.violations
    assert violation.field.startswith(field)
    assert told in violation.description
    if net is SHORTED:
        assert all(name in violation.description for name in ("'upper'", "'lower'"))
        assert "aside" not in violation.description
