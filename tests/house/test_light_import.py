"""The client is thin: importing it starts nothing heavy."""

from __future__ import annotations

import subprocess
import sys


def test_importing_interwind_imports_no_numerics():
    """A caller pays for numpy, grpc and protobuf only."""
    program = "import sys, interwind; print(*sorted({name.split('.')[0] for name in sys.modules}))"
    loaded = set(
        subprocess.run([sys.executable, "-c", program], capture_output=True, check=True, text=True).stdout.split()
    )
    assert set() == loaded & {
        "scipy",
        "interwind_service",
        "matplotlib",
        "grpc_health",
        "grpc_reflection",
        "multiprocessing",
    }
