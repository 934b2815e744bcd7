"""Who is let in, and how: TLS with certificates that change, names, tokens checked before the body, metrics beside."""

from __future__ import annotations

import datetime
import ipaddress
import re
import ssl
import urllib.request
from collections import Counter
from collections.abc import Iterator
from pathlib import Path

import grpc
import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec

import interwind as iw
from interwind_service.testing import RunningService, wait_until

ONE = ("--workers", "1")
INFO = "/interwind.v1.ServerService/GetServerInfo"


class Authority:
    """A certificate authority for one test."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._key = ec.generate_private_key(ec.SECP256R1())
        self._name = x509.Name([x509.NameAttribute(x509.NameOID.COMMON_NAME, "an authority for tests")])
        self.path = folder / "ca.pem"
        certificate = self._certificate(self._name, self._key.public_key(), authority=True)
        self.path.write_bytes(certificate.public_bytes(serialization.Encoding.PEM))

    def issue(self, name: str, file: str) -> tuple[str, str]:
        """Write a certificate for ``name`` on loopback, and its key; return both paths."""
        key = ec.generate_private_key(ec.SECP256R1())
        subject = x509.Name([x509.NameAttribute(x509.NameOID.COMMON_NAME, name)])
        certificate = self._certificate(subject, key.public_key(), authority=False)
        cert_path, key_path = self._folder / f"{file}.pem", self._folder / f"{file}.key"
        key_path.write_bytes(
            key.private_bytes(
                serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
            )
        )
        cert_path.write_bytes(certificate.public_bytes(serialization.Encoding.PEM))
        return str(cert_path), str(key_path)

    def _certificate(self, subject: x509.Name, public_key, *, authority: bool) -> x509.Certificate:
        now = datetime.datetime.now(datetime.UTC)
        builder = (
            x509.CertificateBuilder()
            .subject_name(subject)
            .issuer_name(self._name)
            .public_key(public_key)
            .serial_number(x509.random_serial_number())
            .not_valid_before(now - datetime.timedelta(minutes=1))
            .not_valid_after(now + datetime.timedelta(days=1))
            .add_extension(x509.BasicConstraints(ca=authority, path_length=None), critical=True)
        )
        if not authority:
            loopback = [x509.DNSName("localhost"), x509.IPAddress(ipaddress.ip_address("127.0.0.1"))]
            builder = builder.add_extension(x509.SubjectAlternativeName(loopback), critical=False)
        return builder.sign(self._key, hashes.SHA256())


@pytest.fixture
def authority(tmp_path) -> Authority:
    return Authority(tmp_path)


def served_name(address: str) -> str:
    host, port = address.rsplit(":", 1)
    pem = ssl.get_server_certificate((host, int(port)))
    return x509.load_pem_x509_certificate(pem.encode()).subject.rfc4514_string()


def test_tls_serves_whoever_trusts_it_and_changes_its_certificate_without_a_restart(authority):
    """The authority's certificate opens the door, plain text does not; replaced files show at the next handshake."""
    cert, key = authority.issue("first", "server")
    with RunningService(*ONE, "--tls-cert", cert, "--tls-key", key) as service:
        with iw.connect(service.address, tls_ca=str(authority.path), retries=0) as client:
            client.server_info()
            before = served_name(service.address)
            authority.issue("second", "server")
            after = served_name(service.address)
            client.server_info()  # open connections live on
        with iw.connect(service.address, tls_ca=str(authority.path), retries=0) as client:
            client.server_info()
        with iw.connect(service.address, retries=0) as client, pytest.raises(iw.Unavailable):
            client.server_info()

    assert (before, after) == ("CN=first", "CN=second")


def test_clients_show_their_own_certificate_where_it_is_asked(authority):
    """Mutual TLS: a certificate of the authority, or no connection; its name is the client's."""
    cert, key = authority.issue("server", "server")
    own_cert, own_key = authority.issue("a bench", "client")
    ca = str(authority.path)
    with RunningService(*ONE, "--tls-cert", cert, "--tls-key", key, "--tls-client-ca", ca) as service:
        with iw.connect(service.address, tls_ca=ca, tls_cert=own_cert, tls_key=own_key, retries=0) as client:
            client.server_info()
        with iw.connect(service.address, tls_ca=ca, retries=0) as client, pytest.raises(iw.Unavailable):
            client.server_info()
        wait_until(lambda: any(line.get("client") == "name-a bench" for line in service.log()), 2)


@pytest.fixture(scope="module")
def token_file(tmp_path_factory) -> Path:
    path = tmp_path_factory.mktemp("tokens") / "tokens"
    path.touch(mode=0o600)
    path.write_text("first-token\nsecond-token\n")
    return path


@pytest.fixture(scope="module")
def guarded(token_file) -> Iterator[RunningService]:
    """A server that asks for a token."""
    with RunningService(*ONE, "--token-file", str(token_file)) as service:
        with iw.connect(service.address, token="first-token") as client:
            wait_until(lambda: client.server_info().blas_thread_count == 1, 60)
        yield service


def test_one_unauthenticated_message_of_100_megabytes_is_not_read(guarded):
    """One call, one message of 100 MB: less than 50 ms of processor, no growth."""

    def cost() -> tuple[float, int]:
        fields = Path(f"/proc/{guarded.pid}/stat").read_text().rpartition(")")[2].split()
        return (int(fields[11]) + int(fields[12])) / 100, int(fields[21]) * 4096

    cpu_s, resident = cost()
    with grpc.insecure_channel(guarded.address) as channel, pytest.raises(grpc.RpcError) as caught:
        channel.unary_unary("/interwind.v1.ArrayService/PutArray")(bytes(100_000_000), timeout=20)
    after_s, grown = cost()
    print(f"100 MB without a token: {1e3 * (after_s - cpu_s):.0f} ms of processor, {(grown - resident) / 1e6:.1f} MB")

    assert caught.value.code() is grpc.StatusCode.UNAUTHENTICATED
    assert after_s - cpu_s <= 0.05
    assert grown - resident < 8e6


def test_tokens_open_the_door_and_stay_out_of_the_log(guarded):
    """A token of the file is let in; none, or another, is told so; health needs none."""
    for token in ("first-token", "second-token"):
        with iw.connect(guarded.address, token=token, retries=0) as client:
            client.server_info()
    for token, reason in ((None, "UNAUTHENTICATED"), ("third-token", "UNKNOWN_TOKEN"), ("", "UNKNOWN_TOKEN")):
        with iw.connect(guarded.address, token=token, retries=0) as client:
            with pytest.raises(iw.Unauthenticated) as caught:
                client.check(iw.WindingSet(("a",), [[1.0]]))
            assert caught.value.reason == reason
            assert client.health()

    def callers() -> set[str]:
        return {line["client"] for line in guarded.log() if "client" in line}

    wait_until(lambda: len(callers()) == 2, 2)
    assert all(caller.startswith("token-") for caller in callers())

    def refused() -> list[str]:
        return [line["reason"] for line in guarded.log() if line["event"] == "call_refused"]

    wait_until(lambda: refused().count("UNKNOWN_TOKEN") == 2, 10)  # the log runs behind
    assert {"UNAUTHENTICATED": 1, "UNKNOWN_TOKEN": 2} == Counter(refused()[-3:])  # whoever tries doors is seen
    assert not {"first-token", "third-token"} & set(re.findall(r"[\w-]+", guarded.log_text()))


def test_token_file_is_read_again(guarded, token_file):
    """A token that is taken out of the file stops working, a new one works, without a restart."""
    with iw.connect(guarded.address, token="third-token", retries=0) as client:
        with pytest.raises(iw.Unauthenticated):
            client.server_info()
        token_file.write_text("third-token\n")

        def let_in() -> bool:
            try:
                client.server_info()
            except iw.Unauthenticated:
                return False
            return True

        wait_until(let_in, 5)
    with iw.connect(guarded.address, token="first-token", retries=0) as client, pytest.raises(iw.Unauthenticated):
        client.server_info()


def test_reflection_can_be_switched_off():
    """Nothing tells the contract then."""
    from grpc_reflection.v1alpha import reflection_pb2, reflection_pb2_grpc

    with RunningService(*ONE, "--no-reflection") as service, grpc.insecure_channel(service.address) as channel:
        stub = reflection_pb2_grpc.ServerReflectionStub(channel)
        with pytest.raises(grpc.RpcError) as caught:
            list(stub.ServerReflectionInfo(iter([reflection_pb2.ServerReflectionRequest(list_services="")])))

    assert caught.value.code() is grpc.StatusCode.UNIMPLEMENTED


def test_metrics_carry_the_common_names():
    """Calls by type, service, method and code; seconds; our own gauges."""
    with RunningService(*ONE, "--metrics-listen", "127.0.0.1:0") as service:
        with iw.connect(service.address) as client:
            client.check(iw.WindingSet(("a",), [[1.0]]))
            with pytest.raises(iw.InvalidRequest):
                client._call("check", {"windings": iw.WindingSet(("a",), [[float("inf")]])}, 10.0)
        wait_until(lambda: any("metrics" in line for line in service.log()), 2)
        address = next(line["metrics"] for line in service.log() if "metrics" in line)
        text = urllib.request.urlopen(f"http://{address}/metrics", timeout=10).read().decode()
    labels = 'grpc_method="CheckWindings",grpc_service="interwind.v1.WindingsService",grpc_type="unary"'

    assert f"grpc_server_started_total{{{labels}}} 2.0" in text
    assert 'grpc_code="OK",' + labels in text
    assert 'grpc_code="InvalidArgument",' + labels in text
    for name in (
        "grpc_server_handling_seconds_bucket",
        "interwind_queue_depth 0.0",
        "interwind_workers_busy",
        "interwind_memory_reserved_bytes 0.0",
        "interwind_solve_seconds_sum",
        'interwind_batch_items{state="pending"} 0.0',
    ):
        assert name in text
