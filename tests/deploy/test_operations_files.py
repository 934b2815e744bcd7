"""The operations files say what they promise: they parse, name settings that exist, and give away no rights."""

from __future__ import annotations

import configparser
import dataclasses
import re
import shutil
import subprocess
import tomllib
from pathlib import Path

import pytest
import yaml

from interwind_service.server.settings import Settings

DEPLOY = Path(__file__).parents[2] / "deploy"
SETTINGS = {field.name for field in dataclasses.fields(Settings)} | {"config", "check_config", "print_config"}


def flags(words) -> set[str]:
    """The settings named by the flags among some words."""
    found = (re.match(r"--(?:no-)?([a-z-]+)", str(word)) for word in words)
    return {match.group(1).replace("-", "_") for match in found if match}


def test_every_flag_is_a_setting():
    """Flags in the unit, the image and the manifests are flags of the service."""
    unit = (DEPLOY / "systemd/interwind.service").read_text()
    commands = " ".join(line for line in unit.splitlines() if line.startswith("Exec"))
    image = re.search(r"ENTRYPOINT (\[.*\])", (DEPLOY / "container/Dockerfile").read_text()).group(1)
    (workload,) = [x for x in manifests() if x["kind"] == "StatefulSet"]
    words = commands.split() + yaml.safe_load(image) + workload["spec"]["template"]["spec"]["containers"][0]["args"]
    assert set() == flags(words) - SETTINGS
    assert set() == set(tomllib.loads((DEPLOY / "systemd/service.toml").read_text())) - SETTINGS


def test_settings_file_can_be_used():
    """The settings that the unit starts with are accepted."""
    values = tomllib.loads((DEPLOY / "systemd/service.toml").read_text())
    assert "127.0.0.1:50051" == Settings(**values).listen


@pytest.mark.skipif(shutil.which("systemd-analyze") is None, reason="needs systemd-analyze")
def test_unit_is_hardened():
    """The measure systemd itself gives of what a unit may do: at most 2.0 of 10."""
    command = ["systemd-analyze", "security", "--offline=yes", "--no-pager", str(DEPLOY / "systemd/interwind.service")]
    told = subprocess.run(command, capture_output=True, text=True, check=False)
    exposure = float(re.search(r"exposure level for \S+: ([\d.]+)", told.stdout).group(1))
    assert exposure <= 2.0


def test_unit_tells_readiness_and_drains():
    """Readiness by notification, a watchdog, the signal to the server alone, and more time than its grace."""
    unit = configparser.RawConfigParser(strict=False)
    unit.optionxform = str
    unit.read(DEPLOY / "systemd/interwind.service")
    service = unit["Service"]
    assert ("notify", "mixed", "continue") == (service["Type"], service["KillMode"], service["OOMPolicy"])
    assert float(service["TimeoutStopSec"]) > tomllib.loads((DEPLOY / "systemd/service.toml").read_text())["grace_s"]
    assert "interwind" == service["StateDirectory"]


def test_image_runs_as_nobody_without_a_shell_between():
    """A numeric user that is not root, an entry point that gets the signals, a base that must be stated by digest."""
    lines = (DEPLOY / "container/Dockerfile").read_text().splitlines()
    (user,) = [line.split()[1] for line in lines if line.startswith("USER")]
    assert all(int(part) > 0 for part in user.split(":"))
    assert all(line.split(maxsplit=1)[1].startswith("[") for line in lines if line.startswith("ENTRYPOINT"))
    assert "ARG PYTHON" in lines  # no default: a tag alone is not accepted silently
    assert ["${PYTHON}", "${PYTHON}"] == [line.split()[1] for line in lines if line.startswith("FROM")]
    assert any(line.startswith("HEALTHCHECK") for line in lines)


def manifests():
    """Every object of the Kubernetes file."""
    return list(yaml.safe_load_all((DEPLOY / "kubernetes/interwind.yaml").read_text()))


def test_pods_have_no_rights_and_are_probed():
    """Not root, nothing writable but volumes, no capability; gRPC probes; more time to stop than the grace."""
    (workload,) = [x for x in manifests() if x["kind"] == "StatefulSet"]
    pod = workload["spec"]["template"]["spec"]
    (container,) = pod["containers"]
    assert pod["securityContext"]["runAsNonRoot"]
    assert not pod["automountServiceAccountToken"]
    security = container["securityContext"]
    assert (False, True, ["ALL"]) == (
        security["allowPrivilegeEscalation"], security["readOnlyRootFilesystem"], security["capabilities"]["drop"],
    )  # fmt: skip
    for probe in ("startupProbe", "readinessProbe", "livenessProbe"):
        assert 50051 == container[probe]["grpc"]["port"]
    (grace,) = [word.split("=")[1] for word in container["args"] if word.startswith("--grace-s")]
    assert pod["terminationGracePeriodSeconds"] > float(grace)
    mounted = {mount["name"] for mount in container["volumeMounts"]}
    offered = {volume["name"] for volume in pod["volumes"]}
    offered |= {claim["metadata"]["name"] for claim in workload["spec"]["volumeClaimTemplates"]}
    assert mounted == offered
    (memory,) = [volume for volume in pod["volumes"] if volume["name"] == "shared-memory"]
    assert "Memory" == memory["emptyDir"]["medium"]


def test_manifests_belong_together():
    """A headless service, a disruption budget and a network policy, all for the same pods."""
    kinds = {item["kind"]: item for item in manifests()}
    labels = kinds["StatefulSet"]["spec"]["template"]["metadata"]["labels"]
    assert "None" == kinds["Service"]["spec"]["clusterIP"]
    assert labels == kinds["Service"]["spec"]["selector"]
    assert labels == kinds["PodDisruptionBudget"]["spec"]["selector"]["matchLabels"]
    assert labels == kinds["NetworkPolicy"]["spec"]["podSelector"]["matchLabels"]
    assert kinds["StatefulSet"]["spec"]["serviceName"] == kinds["Service"]["metadata"]["name"]


def test_proxy_reaches_the_contract_and_nothing_else():
    """First gRPC-Web, CORS, then the router; only the contract and health are routed; the admin port is local."""
    proxy = yaml.safe_load((DEPLOY / "proxy/envoy.yaml").read_text())
    (listener,) = proxy["static_resources"]["listeners"]
    manager = listener["filter_chains"][0]["filters"][0]["typed_config"]
    assert ["grpc_web", "cors", "router"] == [item["name"].rpartition(".")[2] for item in manager["http_filters"]]
    routes = manager["route_config"]["virtual_hosts"][0]["routes"]
    assert ["/interwind.v1.", "/grpc.health.v1.Health/"] == [route["match"]["prefix"] for route in routes]
    clusters = {cluster["name"] for cluster in proxy["static_resources"]["clusters"]}
    assert {route["route"]["cluster"] for route in routes} == clusters
    for address in (proxy["admin"]["address"], listener["address"]):
        assert "127.0.0.1" == address["socket_address"]["address"]
