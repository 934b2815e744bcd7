"""The command `interwind-service`. Light on purpose: every worker imports this file again, and gRPC not with it."""

from __future__ import annotations

import os
import sys


def main() -> int:
    """Read the settings and serve; return the exit status."""
    from interwind_service.server.settings import SettingsError, read_settings

    try:
        settings, options = read_settings(sys.argv[1:], os.environ)
        if options.print_config:
            print(settings.to_json())
        if options.print_config or options.check_config:
            return 0
        from interwind_service.server.run import run

        status = run(settings)
        sys.stdout.flush()
        os._exit(status)  # all is kept and said; threads that still wait for a starting worker must not hold us up
    except SettingsError as error:
        print(f"interwind-service: {error}", file=sys.stderr)
        return 2


if __name__ == "__main__":
    sys.exit(main())
