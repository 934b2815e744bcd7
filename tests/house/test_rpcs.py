"""The client reaches every call of the contract; none is left for raw stubs only."""

from __future__ import annotations

import importlib
import pkgutil
import re

import interwind
import interwind.v1
from interwind_service import engine

# Each call of the contract: how a caller says it in Python. `Batch` is what `submit_batch` hands back.
SAID = {
    "CheckWindings": "Client.check",
    "RepairWindings": "Client.repair",
    "IdentifyWindings": "Client.identify",
    "CharacterizeWindings": "Client.characterize",
    "StampNetwork": "Client.stamp",
    "ComputeFrequencyResponse": "Client.frequency_response",
    "ComputePoles": "Client.poles",
    "ComputePortResponse": "Client.port_response",
    "ComputePortFigures": "Client.port_figures",
    "ComputeTimeResponse": "Client.time_response",
    "ComputePeriodicResponse": "Client.periodic_response",
    "SubmitBatch": "Client.submit_batch",
    "GetBatch": "Batch.progress",
    "ListBatches": "Client.batches",
    "WatchBatch": "Batch.watch",
    "StreamBatchResults": "Batch.result",
    "SummarizeBatch": "Batch.summary",
    "CancelBatch": "Batch.cancel",
    "DeleteBatch": "Batch.delete",
    "PutArray": "Client.check",  # arrays too large for one message go this way by themselves, with any call
    "GetArray": "Client.stamp",  # and so do answers that are
    "GetServerInfo": "Client.server_info",
}


def calls() -> set[str]:
    """The name of every call of every service."""
    found = set()
    for module in pkgutil.iter_modules(interwind.v1.__path__):
        if module.name.endswith("_service_pb2"):
            file = importlib.import_module(f"interwind.v1.{module.name}").DESCRIPTOR
            found |= {method.name for service in file.services_by_name.values() for method in service.methods}
    return found


def test_every_call_is_said_by_a_method():
    """Each call has its method, and the method exists."""
    assert set() == calls() - set(SAID)
    silent = []
    for call in sorted(calls()):
        owner, method = SAID[call].split(".")
        if not callable(getattr(getattr(interwind, owner, None), method, None)):
            silent.append(SAID[call])
    assert [] == silent


def test_every_call_is_made_somewhere(root):
    """The modules of the client, the generated ones left out, name every call."""
    paths = [path for path in (root / "client/interwind").rglob("*.py") if path.parent.name != "v1"]
    text = "\n".join(path.read_text(encoding="utf-8") for path in paths)
    assert [] == [call for call in sorted(calls()) if not re.search(rf"\b{call}\b", text)]


def test_no_answer_goes_without_cautions():
    """Even a verdict on a matrix carries the standing statement."""
    report = engine.check(interwind.WindingSet(("a",), [[1.0]]))

    assert "ENGINEERING_ESTIMATE" in [caution.code for caution in report.cautions]
