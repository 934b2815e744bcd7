"""Settings: flag, then environment, then file, then default; what cannot be used is refused with the next move."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

import interwind as iw
from interwind.channel import Target
from interwind.client import Client
from interwind_service.server.settings import Settings, SettingsError, read_settings
from interwind_service.testing import RunningService, wait_until

DOUBLES = Path(__file__).parent / "service_with_doubles.py"


def command(*arguments: str, **environment: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "interwind_service", *arguments],
        env={**os.environ, **environment},
        capture_output=True,
        text=True,
        timeout=60,
    )


@pytest.mark.parametrize(
    ("flag", "environment", "file", "expected"),
    [
        (None, None, None, Settings().workers),
        (None, None, "3", 3),
        (None, "4", "3", 4),
        ("5", "4", "3", 5),
        ("5", None, "3", 5),
        ("5", "4", None, 5),
    ],
)
def test_precedence(tmp_path, flag, environment, file, expected):
    """Flag > environment > file > default."""
    path = tmp_path / "settings.toml"
    path.write_text("" if file is None else f"workers = {file}\n")
    arguments = ["--config", str(path)] + ([] if flag is None else ["--workers", flag])
    settings, _ = read_settings(arguments, {} if environment is None else {"INTERWIND_WORKERS": environment})

    assert settings.workers == expected


@pytest.mark.parametrize(
    ("arguments", "file", "named"),
    [
        (["--workers", "many"], "", "--workers"),
        (["--workers", "-1"], "", "--workers"),
        (["--max-timeout-s", "0"], "", "--max-timeout-s"),
        (["--listen", "localhost"], "", "--listen"),
        (["--listen", "localhost:99999"], "", "--listen"),
        (["--tls-cert", "c.pem"], "", "--tls-key"),
        (["--tls-client-ca", "ca.pem"], "", "--tls-cert"),
        ([], "worker = 3\n", "'worker' is no setting"),
        ([], 'workers = "3"\n', "workers"),
        ([], "workers = \n", "cannot be read"),
    ],
)
def test_what_cannot_be_used_is_named(tmp_path, arguments, file, named):
    """The message names the setting and says what is expected."""
    path = tmp_path / "settings.toml"
    path.write_text(file)
    with pytest.raises(SettingsError, match=named):
        read_settings([*arguments, "--config", str(path)], {})


@pytest.mark.parametrize("listen", ["0.0.0.0:0", "192.0.2.1:0", "[::]:0", "example.org:443"])
def test_open_addresses_need_tls_or_a_word(listen):
    """Refused with both ways out; accepted with either."""
    with pytest.raises(SettingsError, match=r"--tls-cert.*--insecure"):
        read_settings(["--listen", listen], {})

    assert read_settings(["--listen", listen, "--insecure"], {})[0].insecure
    assert read_settings(["--listen", listen, "--tls-cert", "c", "--tls-key", "k"], {})[0].tls_cert == "c"


@pytest.mark.parametrize("listen", ["127.0.0.1:0", "localhost:1", "[::1]:5", "unix:/run/interwind/socket"])
def test_private_addresses_need_nothing(listen):
    """Loopback and sockets are the default way."""
    assert read_settings(["--listen", listen], {})[0].listen == listen


def test_print_config_is_json_and_check_config_is_silent():
    """Both leave at once with 0; a mistake leaves with 2 and one line that says what is wrong."""
    printed = command("--print-config", "--queue-limit", "7", INTERWIND_WORKERS="2")
    checked = command("--check-config")
    wrong = command("--check-config", "--workers", "x")

    settings = json.loads(printed.stdout)
    assert (settings["queue_limit"], settings["workers"], printed.returncode) == (7, 2, 0)
    assert (checked.stdout, checked.stderr, checked.returncode) == ("", "", 0)
    assert (wrong.stdout, wrong.stderr.count("\n"), wrong.returncode) == ("", 1, 2)


def test_second_server_on_a_port_is_refused():
    """Nobody steals another server's connections."""
    with RunningService("--workers", "1") as first:
        second = command("--listen", first.address, "--workers", "1")

    assert second.returncode == 2
    assert "cannot be bound" in second.stderr


def test_server_side_limit_holds_for_every_call(order):
    """Whoever states no deadline, or a longer one, gets the server's."""
    with RunningService("--workers", "1", "--max-timeout-s", "0.5", script=DOUBLES) as service:
        with Client(Target(service.address), retries=0) as client:
            wait_until(lambda: client.server_info().blas_thread_count == 1, 30)
            with pytest.raises(iw.DeadlineExceeded, match=r"0\.5 s"):
                client.check(order("spin", 30), timeout_s=30)
            wait_until(lambda: client.server_info().busy_worker_count == 0, 0.5)


def test_drain_finishes_what_runs_and_takes_nothing_new(lone_service, order):
    """SIGTERM: not serving at once, running calls answered, exit 0 within the grace."""
    with Client(Target(lone_service.address), retries=0) as client, ThreadPoolExecutor(1) as threads:
        running = threads.submit(client.check, order("sleep", 1.0))
        wait_until(lambda: client.server_info().busy_worker_count == 1, 5)
        lone_service.process.send_signal(signal.SIGTERM)
        wait_until(lambda: not client.health(), 0.9)
        with pytest.raises(iw.Unavailable):
            client.check(order("fine"))
        assert running.result(5).labels == ("sleep",)
        assert lone_service.stop() == 0


def test_check_config_reads_the_files_it_names(tmp_path):
    """A token file others may read, and a certificate that is not there, are found before anything is served."""
    tokens = tmp_path / "tokens"
    tokens.write_text("secret\n")
    tokens.chmod(0o644)
    for arguments, named in (
        (["--token-file", str(tokens)], "0600"),
        (["--tls-cert", str(tmp_path / "none.pem"), "--tls-key", str(tmp_path / "none.key")], "No such file"),
        (["--tls-cert", str(tokens), "--tls-key", str(tokens)], "no pair"),
        (["--state-dir", str(tokens / "below")], "no folder"),
        (["--spool-dir", str(tokens)], "no folder"),
    ):
        answer = command("--check-config", *arguments)
        assert (answer.returncode, named in answer.stderr, "secret" in answer.stderr) == (2, True, False)


def test_tokens_handed_over_by_the_supervisor_are_taken_as_they_are(tmp_path):
    """An access list for the service shows as a group's right; a copy in the supervisor's folder is not refused."""
    tokens = tmp_path / "tokens"
    tokens.write_text("secret\n")
    tokens.chmod(0o440)
    arguments = ("--check-config", "--token-file", str(tokens))
    assert 0 == command(*arguments, CREDENTIALS_DIRECTORY=str(tmp_path)).returncode
    assert 2 == command(*arguments, CREDENTIALS_DIRECTORY=str(tmp_path / "other")).returncode


def test_spool_of_a_dead_server_is_cleared_away_and_that_of_a_living_one_kept(tmp_path):
    """Whoever starts next removes what a killed server could not, and touches nobody else's."""
    options = ("--workers", "1", "--spool-dir", str(tmp_path))
    with RunningService(*options) as living:
        (kept,) = tmp_path.iterdir()
        abandoned = tmp_path / "interwind-spool-1-abandoned"
        abandoned.mkdir()
        (abandoned / "lock").touch()
        with RunningService(*options):
            assert not abandoned.exists()
            assert kept.exists()
            assert len(list(tmp_path.iterdir())) == 2
        assert living.process.poll() is None
    assert list(tmp_path.iterdir()) == []
