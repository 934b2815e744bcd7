"""The folder's own modules (random networks, the high-precision reference) can be imported by its tests."""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
