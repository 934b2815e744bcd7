"""The client is thin: importing it starts nothing heavy."""

from __future__ import annotations

import subprocess
import sys

HEAVY = {"scipy", "interwind_service", "matplotlib", "multiprocessing"}


def test_importing_interwind_imports_no_numerics():
    """A caller pays for numpy, grpc and protobuf only."""
    program = "import sys, interwind; print(*sorted({name.split('.')[0] for name in sys.modules}))"
    ran = subprocess.run([sys.executable, "-c", program], capture_output=True, check=True, text=True)
    assert set() == set(ran.stdout.split()) & HEAVY
