"""The real server with its test doubles, and a disk of SMALL_DISK_BYTES mounted on SMALL_DISK that it alone sees.

Runs as a program: makes itself a name space of users and mounts, mounts, and becomes the server, under the same number.
"""

import os
import sys
from pathlib import Path

DOUBLES = Path(__file__).parent / "service_with_doubles.py"

if __name__ == "__main__":
    mount = 'mount -t tmpfs -o size="$SMALL_DISK_BYTES" none "$SMALL_DISK" && exec "$@"'
    server = [sys.executable, str(DOUBLES), *sys.argv[1:]]
    os.execvp("unshare", ["unshare", "--map-root-user", "--mount", "sh", "-c", mount, "sh", *server])
