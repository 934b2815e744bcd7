"""Write the stubs in client/interwind/v1 anew: python deploy/generate.py

The compiler is an old one on purpose: stubs of an old compiler load on old and new runtimes, stubs of a new one only on
new runtimes. So its version is the lower bound of grpcio and protobuf in pyproject.toml, and it lives in a throwaway
environment of its own.
"""

from __future__ import annotations

import hashlib
import subprocess
import sys
import tempfile
import venv
from pathlib import Path

COMPILER = "grpcio-tools==1.66.2"
ROOT = Path(__file__).resolve().parent.parent
PROTO = ROOT / "proto"
OUT = ROOT / "client" / "interwind" / "v1"


def source_hash() -> str:
    """Return the SHA-256 of the contract's sources; tests/house compares it with the one in the stubs."""
    digest = hashlib.sha256()
    for path in sorted((PROTO / "interwind" / "v1").glob("*.proto")):
        digest.update(path.name.encode() + b"\0" + path.read_bytes() + b"\0")
    return digest.hexdigest()


def compiler() -> Path:
    """Return a Python that has the compiler, made once in the temporary folder."""
    folder = Path(tempfile.gettempdir()) / f"interwind-{COMPILER.replace('==', '-')}"
    python = folder / "bin" / "python"
    if not (folder / "ready").exists():
        venv.create(folder, with_pip=True, clear=True)
        subprocess.run([python, "-m", "pip", "install", "-q", COMPILER, "setuptools<80"], check=True)
        (folder / "ready").touch()
    return python


def main() -> None:
    """Delete the old stubs and write new ones."""
    python = compiler()
    for old in OUT.glob("*_pb2*"):
        old.unlink()
    sources = sorted(str(path.relative_to(PROTO)) for path in (PROTO / "interwind" / "v1").glob("*.proto"))
    services = [name for name in sources if name.endswith("_service.proto")]
    out = ROOT / "client"
    protoc = [str(python), "-m", "grpc_tools.protoc", "-I", "."]
    subprocess.run([*protoc, f"--python_out={out}", f"--pyi_out={out}", *sources], cwd=PROTO, check=True)
    subprocess.run([*protoc, f"--grpc_python_out={out}", *services], cwd=PROTO, check=True)
    (OUT / "__init__.py").write_text(
        '"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""\n\n'
        f'SOURCE_SHA256 = "{source_hash()}"\n'
    )


if __name__ == "__main__":
    sys.exit(main())
