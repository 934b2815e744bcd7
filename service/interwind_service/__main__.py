"""The command `interwind-service`. Light on purpose: every worker imports this file again, and gRPC not with it."""

from __future__ import annotations

import os
import sys
from typing import NoReturn


def main() -> int:
    """Read the settings and serve; return the exit status."""
    from interwind_service.server.settings import SettingsError, read_settings

    try:
        settings, options = read_settings(sys.argv[1:], os.environ)
        if options.print_config:
            print(settings.to_json())
        if options.check_config:
            from interwind_service.server.doors import check_files

            check_files(settings)
        if options.print_config or options.check_config:
            return 0
        from interwind_service.workers.forking import start_forkserver

        start_forkserver()
        from interwind_service.server.run import run

        _leave(run(settings))
    except SettingsError as error:
        print(f"interwind-service: {error}", file=sys.stderr)
        _leave(2)


def _leave(status: int) -> NoReturn:
    """End the process: all is kept and said, and threads that wait for a starting worker must not hold it up."""
    sys.stdout.flush()
    sys.stderr.flush()
    os._exit(status)


if __name__ == "__main__":
    sys.exit(main())
