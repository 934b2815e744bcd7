"""Reads the command line, calls the service, and turns its refusals into exit statuses."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from google.rpc import code_pb2

import interwind
from interwind.cli.columns import noticed_in
from interwind.cli.output import check_ending, write
from interwind.codec.batch import Submission, submission_from_message
from interwind.codec.calls import BY_ENGINE
from interwind.codec.json import message_from_json
from interwind.errors import InterwindError, InvalidRequest, Unavailable
from interwind.model.batch import VariantStatus
from interwind.v1 import batch_service_pb2

FAILED, USAGE, REFUSED, INTERRUPTED = 1, 2, 64, 130
HEALTH_TIMEOUT_S = 5.0

# Each command that takes a request: the call it makes, and what it does in words.
REQUESTS = {
    "check": ("check", "say whether windings can exist, and which entry is to blame when they cannot"),
    "repair": ("repair", "mend a set of windings with the least harm"),
    "identify": ("identify", "find the windings that bench readings support best"),
    "characterize": ("characterize", "show leakages, modes and equivalent circuits of windings"),
    "frequency": ("frequency_response", "solve a network over frequency"),
    "poles": ("poles", "find the natural modes of a network"),
    "ports": ("port_response", "show impedance, admittance and scattering of a network's ports over frequency"),
    "port-figures": ("port_figures", "show what is read off the ports over frequency: losses, transfers, links"),
    "time": ("time_response", "solve a network over time"),
    "periodic": ("periodic_response", "find the periodic steady state of a network"),
    "batch": ("submit_batch", "compute many variants of one network and wait for all of them"),
}


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command ``interwind`` and return its exit status."""
    options = _parser().parse_args(arguments)
    try:
        call = _read(options)
    except (InvalidRequest, OSError) as error:
        return _say(f"interwind: {error}", USAGE)
    try:
        with interwind.connect(options.address) as solver:
            answer = call(solver)
    except KeyboardInterrupt:
        return _say("interwind: interrupted; the call was cancelled", INTERRUPTED)
    except InterwindError as error:
        return _say(f"interwind: {error.reason}: {error}", REFUSED + code_pb2.Code.Value(error.code))
    for line in noticed_in(answer):
        _say(line)
    try:
        write(answer, options.output, as_json=options.json)
        if options.plot:
            from interwind.plot import save

            save(answer, options.plot)
    except BrokenPipeError:  # the reader, such as head, has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except (OSError, InvalidRequest) as error:
        return _say(f"interwind: {error}", USAGE)
    failed = isinstance(answer, interwind.BatchResult) and VariantStatus.FAILED in answer.status
    return FAILED if failed else 0


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="interwind",
        description="Judge windings and solve the networks they stand in.",
        epilog="Exit status: 0 answered, 1 a variant of a batch failed, 2 the command or its file cannot be "
        "understood, 64 + n the service refused with gRPC status n, 130 interrupted. INTERWIND_ADDRESS names the "
        "service; without it one is started.",
    )
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")
    for name, (_, purpose) in REQUESTS.items():
        command = commands.add_parser(name, help=purpose, description=purpose[0].upper() + purpose[1:] + ".")
        command.add_argument("file", metavar="FILE", help="the request as JSON, fields as in the contract; - = stdin")
        allowed = "for the batch (default: as long as it takes)" if name == "batch" else "for the call (default 30)"
        command.add_argument("--timeout-s", type=float, help=f"seconds allowed {allowed}")
        command.add_argument("--plot", metavar="FILE.png", help="draw the answer into this file, too")
        _add_common(command)
    for name, purpose in (("health", "say whether the service serves"), ("info", "show versions, limits and workers")):
        command = commands.add_parser(name, help=purpose)
        command.set_defaults(plot=None)
        _add_common(command)
    return parser


def _add_common(command: argparse.ArgumentParser) -> None:
    command.add_argument("--address", metavar="HOST:PORT", help="the service to ask")
    command.add_argument("--json", action="store_true", help="print the answer as JSON")
    command.add_argument("--output", metavar="FILE", help="write the answer here: .npz, .csv or .json by the ending")


def _read(options: argparse.Namespace) -> Callable[[interwind.Client], Any]:
    """Return what to ask a client, everything of the command line and its file having been understood."""
    if options.output:
        check_ending(options.output)
    if options.command == "health":
        return _health
    if options.command == "info":
        return lambda solver: solver.server_info()
    text = sys.stdin.read() if options.file == "-" else Path(options.file).read_text(encoding="utf-8")
    extra: dict[str, Any] = {} if options.timeout_s is None else {"timeout_s": options.timeout_s}
    shown: dict[str, Any] = {"progress": _show_progress} if sys.stderr.isatty() else {}
    if options.command == "batch":
        submission = submission_from_message(message_from_json(batch_service_pb2.SubmitBatchRequest(), text))
        return lambda solver: _batch(solver, submission, extra | shown)
    method = REQUESTS[options.command][0]
    call = BY_ENGINE[method]
    subject, *others = call.decode(message_from_json(call.request_class(), text)).items()
    extra |= dict(others) | (shown if call.streaming else {})
    return lambda solver: getattr(solver, method)(subject[1], **extra)


def _batch(solver: interwind.Client, submission: Submission, waiting: dict[str, Any]) -> interwind.BatchResult:
    batch = solver.submit_batch(
        submission.network, submission.analysis, submission.columns, submission.request_id or None
    )
    _say(f"batch {batch.id}")
    return batch.result(**waiting)


@dataclass(frozen=True, slots=True)
class Health:
    """What `health` answers; where no service answers the exit status says so."""

    status: str


def _health(solver: interwind.Client) -> Health:
    if not solver.health(timeout_s=HEALTH_TIMEOUT_S):
        raise Unavailable(f"no service takes calls at {solver.address}")
    return Health("SERVING")


def _show_progress(done: int, total: int) -> None:
    end = "\n" if done >= total else ""
    print(f"\r{done} of {total}", end=end, file=sys.stderr, flush=True)


def _say(line: str, status: int = 0) -> int:
    """Print a line for people on standard error, its first word in bold on a terminal that wants it."""
    plain = "NO_COLOR" in os.environ or os.environ.get("TERM") == "dumb" or not sys.stderr.isatty()
    first, _, rest = line.partition(" ")
    print(line if plain else f"\033[1m{first}\033[0m {rest}", file=sys.stderr)
    return status


if __name__ == "__main__":
    sys.exit(main())
