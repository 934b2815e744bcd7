"""The committed stubs are those of the committed contract; proven by hash, so that no compiler is needed here."""

from __future__ import annotations

import hashlib

import interwind.v1


def test_the_stubs_are_fresh(root):
    """Whoever changes a .proto runs `python deploy/generate.py` and commits what it wrote."""
    digest = hashlib.sha256()
    for path in sorted((root / "proto/interwind/v1").glob("*.proto")):
        digest.update(path.name.encode() + b"\0" + path.read_bytes() + b"\0")
    assert digest.hexdigest() == interwind.v1.SOURCE_SHA256


def test_every_source_has_its_stubs(root):
    """One module a source with its types, one more for the sources that hold a service."""
    sources = {path.stem for path in (root / "proto/interwind/v1").glob("*.proto")}
    stubs = {path.name for path in (root / "client/interwind/v1").glob("*_pb2*")}
    expected = {f"{name}_pb2.{ending}" for name in sources for ending in ("py", "pyi")}
    expected |= {f"{name}_pb2_grpc.py" for name in sources if name.endswith("_service")}
    assert expected == stubs
