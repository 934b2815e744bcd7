"""A stranger's caller: the contract alone, compiled in a scratch folder, is enough to use the service."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

PROTO = Path(__file__).parents[2] / "proto"

STRANGER = '''
import hashlib, math, struct, sys
import grpc
from google.protobuf import descriptor_pb2, descriptor_pool, message_factory

pool = descriptor_pool.DescriptorPool()
for file in descriptor_pb2.FileDescriptorSet.FromString(open("contract.binpb", "rb").read()).file:
    pool.Add(file)


class Contract:
    """Message classes by name, made of the compiled contract."""

    def __getattr__(self, name):
        return message_factory.GetMessageClass(pool.FindMessageTypeByName("interwind.v1." + name))


v1 = Contract()
COMPLEX128 = pool.FindEnumTypeByName("interwind.v1.Dtype").values_by_name["DTYPE_COMPLEX128"].number
channel = grpc.insecure_channel(sys.argv[1])


def method(service, name, kind):
    return kind(
        f"/interwind.v1.{service}/{name}",
        request_serializer=lambda message: message.SerializeToString(),
        response_deserializer=getattr(v1, name + "Response").FromString,
    )


def typed(shape, values):
    return v1.Array(shape=shape, values=v1.DoubleList(values=values))


def streamed(parts):
    """The arrays of an answer by name, and its trailer; the checksum must agree."""
    header, data, trailer = None, b"", None
    for part in parts:
        kind = part.WhichOneof("part")
        if kind == "header":
            header = part.header
        elif kind == "chunk":
            data += part.chunk.data
        elif kind == "trailer":
            trailer = part.trailer
    assert hashlib.sha256(data).hexdigest() == trailer.sha256
    arrays, start = {}, 0
    for array in header.arrays:  # their bytes stand one after the other; a complex number is two doubles
        doubles = math.prod(array.shape) * (2 if array.dtype == COMPLEX128 else 1)
        arrays[array.name] = struct.unpack_from(f"<{doubles}d", data, start)
        start += 8 * doubles
    return arrays, trailer


pair = v1.WindingSet(labels=["drive", "rail"], inductance_h=typed([2, 2], [4e-3, 1e-3, 1e-3, 1e-3]))
check = method("WindingsService", "CheckWindings", channel.unary_unary)
answer = check(v1.CheckWindingsRequest(size=v1.Size(winding_count=2), windings=pair), timeout=30)
low, high = struct.unpack("<2d", answer.eigenvalues.data)
verdicts = answer.DESCRIPTOR.fields_by_name["verdict"].enum_type.values_by_number
print(verdicts[answer.verdict].name, round(low, 12), round(high, 12))

# 1 V in series with 1 ohm and 1 H: current 1 / (1 + j) at 1 rad/s, 1 - exp(-t) after a step.
source = v1.VoltageSource(
    a="in", b="0", phasor=v1.Phasor(real=1.0), waveform=v1.Waveform(step=v1.Step(value=1.0))
)
network = v1.Network(
    reference="0",
    elements=[
        v1.Element(name="supply", voltage_source=source),
        v1.Element(name="r", resistor=v1.Resistor(a="in", b="mid", resistance_ohm=1.0)),
        v1.Element(name="l", inductor=v1.Inductor(a="mid", b="0", inductance_h=1.0)),
    ],
)
current = v1.Observable(element_current="l")
size = v1.Size(unknown_count=6, point_count=1, observable_count=1)
over_frequency = method("ResponseService", "ComputeFrequencyResponse", channel.unary_stream)
request = v1.ComputeFrequencyResponseRequest(
    size=size, network=network, frequency_hz=typed([1], [0.15915494309189535]), observe=[current]
)
arrays, _ = streamed(over_frequency(request, timeout=30))
print(*(round(number, 12) for number in arrays["samples"]))

size.point_count = 100_001
over_time = method("ResponseService", "ComputeTimeResponse", channel.unary_stream)
request = v1.ComputeTimeResponseRequest(size=size, network=network, stop_s=10.0, step_s=1e-4, observe=[current])
arrays, trailer = streamed(over_time(request, timeout=30))
print(arrays["time_s"][-1], round(arrays["samples"][-1], 12), trailer.evidence.energy_error < 1e-9)
print("interwind" in sys.modules)
'''


@pytest.fixture(scope="module")
def scratch(tmp_path_factory) -> Path:
    """A folder that holds nothing but the compiled contract and the stranger's program."""
    folder = tmp_path_factory.mktemp("stranger")
    buf = Path(sys.executable).with_name("buf")
    if not buf.exists():
        pytest.skip("buf, of the extra dev, compiles the contract for the stranger")
    subprocess.run([buf, "build", PROTO, "-o", folder / "contract.binpb"], check=True)
    (folder / "stranger.py").write_text(STRANGER)
    return folder


def test_contract_alone_is_enough(scratch, real_service):
    """A check, a frequency response and a streamed time response, without the client package.

    Values: k = 1e-3 / sqrt(4e-3 * 1e-3) = 0.5, so the eigenvalues are 0.5 and 1.5; i = 1 / (1 + j) = 0.5 - 0.5 j;
    1 - exp(-10) = 0.999954600070 (derived).
    """
    told = subprocess.run(
        [sys.executable, "-P", str(scratch / "stranger.py"), real_service.address],
        cwd=scratch,
        capture_output=True,
        text=True,
    )

    assert told.stderr == ""
    assert told.stdout.splitlines() == [
        "VERDICT_VALID 0.5 1.5",
        "0.5 -0.5",
        "10.0 0.99995460007 True",
        "False",
    ]
