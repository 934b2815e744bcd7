"""What the operator may set: flag, then environment (INTERWIND_...), then TOML file, then default."""

from __future__ import annotations

import argparse
import dataclasses
import json
import os
import tomllib
import typing
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from interwind_service.tolerances import (
    DEFAULT_ARRAY_STORE_BYTES,
    DEFAULT_GRACE_S,
    DEFAULT_MAX_TIMEOUT_S,
    DEFAULT_MEMORY_SHARE,
    DEFAULT_QUEUE_PER_WORKER,
)


class SettingsError(ValueError):
    """A setting that cannot be used; the message names it, the value found and what is expected."""


def _setting(default: Any, help: str, check: str = "") -> Any:
    return field(default=default, metadata={"help": help, "check": check})


@dataclass(frozen=True, slots=True)
class Settings:
    """Every setting with its default; None = chosen when the server starts."""

    listen: str = _setting("127.0.0.1:0", "HOST:PORT (port 0: any free one) or unix:PATH")
    workers: int = _setting(0, "worker processes (0: one a core)", "at least 0")
    state_dir: str = _setting("", "folder for what outlives the server: batches and their results")
    queue_limit: int = _setting(-1, f"calls that may wait (-1: {DEFAULT_QUEUE_PER_WORKER} a worker)", "at least -1")
    client_limit: int = _setting(
        0, "calls one client may have in the server (0: as many as there is room)", "at least 0"
    )
    memory_limit_bytes: int = _setting(0, "memory of all calls together (0: half of the machine's)", "at least 0")
    array_store_bytes: int = _setting(DEFAULT_ARRAY_STORE_BYTES, "uploaded and fetched arrays together", "above 0")
    max_timeout_s: float = _setting(DEFAULT_MAX_TIMEOUT_S, "longest time a call may take", "above 0")
    grace_s: float = _setting(DEFAULT_GRACE_S, "time for running calls when asked to stop", "at least 0")
    executor: str = _setting("", "where batches are computed (empty: own workers; dask=tls://HOST:PORT)")
    retain_days: float = _setting(30.0, "days a finished batch is kept", "above 0")
    token_file: str = _setting("", "file of bearer tokens, one a line, mode 0600")
    tls_cert: str = _setting("", "certificate chain, PEM")
    tls_key: str = _setting("", "private key, PEM")
    tls_client_ca: str = _setting("", "authority whose certificates clients must show, PEM")
    insecure: bool = _setting(False, "serve an open address without TLS")
    reflection: bool = _setting(True, "answer questions about the contract itself")
    metrics_listen: str = _setting("", "HOST:PORT for metrics (empty: none)")
    spool_dir: str = _setting("", "folder for results on their way out (empty: memory-backed where there is one)")
    parent_pid: int = _setting(
        0,
        "end, with the folder of the socket, when this is not the parent (embedded)",
        "at least 0",
    )

    def __post_init__(self) -> None:
        for entry in dataclasses.fields(self):
            value, check = getattr(self, entry.name), entry.metadata["check"]
            if check and not (value > 0 if check == "above 0" else value >= int(check.removeprefix("at least "))):
                raise SettingsError(f"{_flag(entry.name)}: {value!r} found; {check} is expected")
        if bool(self.tls_cert) != bool(self.tls_key):
            raise SettingsError("--tls-cert, --tls-key: one found without the other; state both or neither")
        if self.tls_client_ca and not self.tls_cert:
            raise SettingsError("--tls-client-ca: found without --tls-cert; client certificates need TLS")
        if self.parent_pid and not self.listen.startswith("unix:"):
            raise SettingsError("--parent-pid: found with a port; an embedded service listens on unix:PATH")
        for name in ("listen", "metrics_listen"):
            value = getattr(self, name)
            if value or name == "listen":
                split_address(value, _flag(name))
        if not (self.tls_cert or self.insecure or _private(self.listen)):
            raise SettingsError(
                f"--listen: {self.listen!r} is open to other machines; state --tls-cert and --tls-key, or --insecure"
            )

    @property
    def worker_count(self) -> int:
        """Workers to start."""
        return self.workers or os.cpu_count() or 1

    @property
    def queue_count(self) -> int:
        """Calls that may wait."""
        return self.queue_limit if self.queue_limit >= 0 else DEFAULT_QUEUE_PER_WORKER * self.worker_count

    @property
    def memory_bytes(self) -> int:
        """Memory budget of all calls together."""
        if self.memory_limit_bytes:
            return self.memory_limit_bytes
        return int(DEFAULT_MEMORY_SHARE * os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES"))

    def to_json(self) -> str:
        """Return the settings as one JSON object, sorted."""
        return json.dumps(dataclasses.asdict(self), indent=2, sort_keys=True)


def split_address(address: str, flag: str = "--listen") -> tuple[str, int]:
    """Return host and port of HOST:PORT; ("unix", 0) for a socket path."""
    if address.startswith("unix:"):
        return "unix", 0
    host, colon, port = address.rpartition(":")
    if not colon or not host or not port.isdigit() or int(port) > 65535:
        raise SettingsError(f"{flag}: {address!r} found; HOST:PORT or unix:PATH is expected")
    return host.strip("[]"), int(port)


def _private(address: str) -> bool:
    host, _ = split_address(address)
    return host in ("unix", "localhost", "::1") or host.startswith("127.")


def read_settings(arguments: Sequence[str], environment: Mapping[str, str]) -> tuple[Settings, argparse.Namespace]:
    """Return the settings and the parsed command line (for ``check_config`` and ``print_config``)."""
    options = _parser().parse_args(arguments)
    kinds = typing.get_type_hints(Settings)
    values: dict[str, Any] = {}
    path = options.config or environment.get("INTERWIND_CONFIG", "")
    if path:
        values.update(_from_file(Path(path), kinds))
    for name, kind in kinds.items():
        text = environment.get(f"INTERWIND_{name.upper()}")
        if text is not None:
            values[name] = _convert(text, kind, f"INTERWIND_{name.upper()}")
        given = getattr(options, name)
        if given is not None:
            values[name] = given if kind is bool else _convert(given, kind, _flag(name))
    return Settings(**values), options


def _from_file(path: Path, kinds: Mapping[str, type]) -> dict[str, Any]:
    try:
        table = tomllib.loads(path.read_text())
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise SettingsError(f"--config: {path} cannot be read: {error}") from error
    for name, value in table.items():
        if name not in kinds:
            raise SettingsError(f"{path}: {name!r} is no setting; known are {', '.join(sorted(kinds))}")
        kind = kinds[name]
        if type(value) is not kind and not (kind is float and type(value) is int):
            raise SettingsError(f"{path}: {name} = {value!r} found; {kind.__name__} is expected")
    return {name: kinds[name](value) for name, value in table.items()}


def _convert(text: str, kind: type, name: str) -> Any:
    if kind is bool:
        truths = {"1": True, "true": True, "yes": True, "0": False, "false": False, "no": False, "": False}
        if text.lower() in truths:
            return truths[text.lower()]
    else:
        try:
            return kind(text)
        except ValueError:
            pass
    raise SettingsError(f"{name}: {text!r} found; {kind.__name__} is expected")


def _flag(name: str) -> str:
    return "--" + name.replace("_", "-")


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="interwind-service",
        description="Serve interwind.v1. Every flag may stand in the environment (INTERWIND_...) or a TOML file, too; "
        "flag > environment > file > default.",
        allow_abbrev=False,
    )
    kinds = typing.get_type_hints(Settings)
    for entry in dataclasses.fields(Settings):
        text = f"{entry.metadata['help']} (default: {entry.default!r})".replace("%", "%%")
        if kinds[entry.name] is bool:
            parser.add_argument(_flag(entry.name), action=argparse.BooleanOptionalAction, default=None, help=text)
        else:
            parser.add_argument(_flag(entry.name), metavar=kinds[entry.name].__name__.upper(), help=text)
    parser.add_argument("--config", metavar="FILE", help="TOML file of settings, spelled as the flags with underscores")
    parser.add_argument("--check-config", action="store_true", help="say whether the settings can be used, and leave")
    parser.add_argument("--print-config", action="store_true", help="print the settings as JSON, and leave")
    return parser
