"""Whatever comes through the wire is answered with a status of ours, a field path and no exception text."""

from __future__ import annotations

import grpc
import pytest
from google.rpc import error_details_pb2, status_pb2
from grpc_health.v1 import health_pb2, health_pb2_grpc
from grpc_reflection.v1alpha import reflection_pb2, reflection_pb2_grpc

from interwind.codec.calls import CALLS
from interwind.codec.errors import to_status
from interwind.errors import InterwindError, error_classes
from interwind.v1 import response_pb2, windings_pb2, windings_service_pb2
from interwind_service.server.limits import size_header
from interwind_service.testing import wait_until

CHECK = "/interwind.v1.WindingsService/CheckWindings"


def send(service, path: str, data: bytes, streaming: bool = False, **options) -> bytes:
    with grpc.insecure_channel(service.address) as channel:
        if streaming:
            return b"".join(channel.unary_stream(path)(data, timeout=20, **options))
        return channel.unary_unary(path)(data, timeout=20, **options)


def details(error: grpc.RpcError) -> dict[str, bytes]:
    packed = dict(error.trailing_metadata())["grpc-status-details-bin"]
    return {detail.type_url.rpartition(".")[2]: detail.value for detail in status_pb2.Status.FromString(packed).details}


@pytest.mark.parametrize(
    "data", [b"\xff" * 40, b"\x0a\x7f", b"\x12\xff\xff\xff\xff\x0f", b"GET / HTTP/1.1", b"\x0a\x02\x08"]
)
@pytest.mark.parametrize("path", sorted(CALLS))
def test_malformed_messages_are_invalid(service, path, data):
    """Bytes that are no message of the contract: INVALID_ARGUMENT, with a reason, for every call."""
    with pytest.raises(grpc.RpcError) as caught:
        send(service, path, data, CALLS[path].streaming)
    info = error_details_pb2.ErrorInfo.FromString(details(caught.value)["ErrorInfo"])

    assert caught.value.code() is grpc.StatusCode.INVALID_ARGUMENT
    assert (info.domain, info.reason.isupper()) == ("interwind.v1", True)


def test_size_is_read_from_the_first_bytes_only():
    """The header is the first field; whatever else stands there is left to the worker."""
    windings = windings_pb2.WindingSet(labels=["a"])
    sized = windings_service_pb2.CheckWindingsRequest(size=response_pb2.Size(winding_count=7), windings=windings)
    bare = windings_service_pb2.CheckWindingsRequest(windings=windings)

    assert response_pb2.Size.FromString(size_header(sized.SerializeToString())).winding_count == 7
    assert size_header(bare.SerializeToString()) == b""
    assert size_header(b"") == b""


def test_a_second_size_is_refused(service):
    """Nobody is admitted by one size and computed by another."""
    small = windings_service_pb2.CheckWindingsRequest(size=response_pb2.Size(winding_count=1)).SerializeToString()
    large = windings_service_pb2.CheckWindingsRequest(size=response_pb2.Size(winding_count=3000)).SerializeToString()
    with pytest.raises(grpc.RpcError) as caught:
        send(service, CHECK, small + large)
    bad = error_details_pb2.BadRequest.FromString(details(caught.value)["BadRequest"])

    assert [violation.field for violation in bad.field_violations] == ["size"]


@pytest.mark.parametrize(("field", "value"), [("winding_count", -1), ("winding_count", 10**9), ("point_count", 2**60)])
def test_impossible_sizes_are_refused_before_any_work(service, field, value):
    """Negative, beyond the limit, or more than the memory budget could ever hold."""
    request = windings_service_pb2.CheckWindingsRequest(size=response_pb2.Size(**{field: value}))
    with pytest.raises(grpc.RpcError) as caught:
        send(service, CHECK, request.SerializeToString())

    assert caught.value.code() is grpc.StatusCode.INVALID_ARGUMENT
    assert "BadRequest" in details(caught.value)


@pytest.mark.parametrize("cls", error_classes(), ids=lambda cls: cls.__name__)
def test_every_error_fits_its_trailer(cls: type[InterwindError]):
    """The packed form stays below what every gRPC client takes in trailers, however much an error says."""
    error = cls("m" * 50_000, metadata={f"key_{k}": "v" * 5000 for k in range(100)}, retry_after_s=1.5)

    assert len(to_status(error)) < 6 * 1024


def test_health_and_reflection_speak_for_every_service(service):
    """Standard clients find what is served, and whether it serves."""
    with grpc.insecure_channel(service.address) as channel:
        health = health_pb2_grpc.HealthStub(channel)
        ask = reflection_pb2.ServerReflectionRequest(list_services="")
        (answer,) = reflection_pb2_grpc.ServerReflectionStub(channel).ServerReflectionInfo(iter([ask]), timeout=10)
        names = {item.name for item in answer.list_services_response.service}
        ours = {name for name in names if name.startswith("interwind.v1.")}
        states = {
            name: health.Check(health_pb2.HealthCheckRequest(service=name), timeout=10).status for name in ["", *ours]
        }

    assert {path.split("/")[1] for path in CALLS} | {"interwind.v1.ArrayService", "interwind.v1.ServerService"} <= ours
    assert set(states.values()) == {health_pb2.HealthCheckResponse.SERVING}


def test_every_call_is_one_line_of_json(service, client, order):
    """Method, code, seconds, bytes; neither the payload nor a secret."""
    client.check(order("visible_label"))

    def lines():
        return [line for line in service.log() if line.get("method") == CHECK and line["code"] == "OK"]

    wait_until(lambda: bool(lines()), 2)
    line = lines()[-1]

    assert {"time", "level", "duration_s", "peer", "client", "id", "bytes_in", "queue_s", "solve_s"} <= set(line)
    assert "visible_label" not in service.log_text()
