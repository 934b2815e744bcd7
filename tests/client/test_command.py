"""The command `interwind`: a request file in, data out, and a telling exit status."""

from __future__ import annotations

import csv
import io
import json

import numpy as np
import pytest

import interwind as iw
from interwind.cli.main import main

PAIR = {"values": {"values": [1.0e-3, 0.23e-3, 0.23e-3, 60e-6]}, "shape": [2, 2]}
SET = {"labels": ["drive", "rail"], "inductance_h": PAIR, "resistance_ohm": {"values": {"values": [0.6, 0.03]}}}
ELEMENTS = [
    {
        "name": "T1",
        "windings": {
            "windings": SET,
            "terminals": [
                {"label": "drive", "start": "in", "finish": "chassis"},
                {"label": "rail", "start": "out", "finish": "chassis"},
            ],
        },
    },
    {"name": "load", "resistor": {"a": "out", "b": "chassis", "resistance_ohm": 50.0}},
    {
        "name": "supply",
        "voltage_source": {
            "a": "in", "b": "chassis", "phasor": {"real": 1.0}, "waveform": {"step": {"value": 10.0}},
        },
    },
]  # fmt: skip
NETWORK = {"reference": "chassis", "elements": ELEMENTS}
OBSERVE = [{"node_voltage": {"node": "out"}}, {"winding_current": {"name": "T1", "label": "rail"}}]
SWEEP = {"network": NETWORK, "frequency_hz": {"values": {"values": [1e3, 1e5]}}, "observe": OBSERVE}


@pytest.fixture(scope="module")
def address():
    """A service of our own for the whole file."""
    with iw.connect() as solver:
        yield solver.address


@pytest.fixture
def run(address, tmp_path, capsys):
    """Run the command on a request; its status, standard output and standard error."""

    def run(command, request=None, *options):
        files = []
        if request is not None:
            (tmp_path / "request.json").write_text(request if isinstance(request, str) else json.dumps(request))
            files = [str(tmp_path / "request.json")]
        status = main([command, *files, "--address", address, *options])
        return status, *capsys.readouterr()

    return run


def mesh_currents(frequency_hz: float) -> tuple[complex, complex]:
    """Two coupled windings, a load and a source of 1 V: the currents of both windings by hand (derived)."""
    w = 2j * np.pi * frequency_hz
    m, l1, l2, r1, r2, load = 0.23e-3, 1.0e-3, 60e-6, 0.6, 0.03, 50.0
    i1, i2 = np.linalg.solve([[r1 + w * l1, w * m], [w * m, r2 + w * l2 + load]], [1.0, 0.0])
    return i1, i2


def closed_form(frequency_hz: float) -> tuple[complex, complex]:
    """Output voltage and rail current."""
    _, i2 = mesh_currents(frequency_hz)
    return -50.0 * i2, i2


def test_check_prints_the_verdict(run):
    """The verdict of a set that can exist goes to standard output, one named value a line."""
    status, out, _ = run("check", {"windings": SET})
    assert 0 == status
    assert "verdict VALID" in out.splitlines()


def test_check_as_json_is_the_contract(run):
    """With --json the answer is the contract's own message."""
    status, out, _ = run("check", {"windings": SET}, "--json")
    assert (0, "VERDICT_VALID") == (status, json.loads(out)["verdict"])


def test_a_sweep_is_a_table(run):
    """Columns are headed by the observable; the numbers are those of the closed form."""
    status, out, _ = run("frequency", SWEEP)
    heading, *rows = csv.reader(io.StringIO(out))
    assert 0 == status
    assert [
        "frequency_hz",
        "node_voltage out real",
        "node_voltage out imag",
        "winding_current T1 rail real",
        "winding_current T1 rail imag",
    ] == heading
    for row in np.array(rows, dtype=float):
        voltage, current = closed_form(row[0])
        assert row[1] + 1j * row[2] == pytest.approx(voltage, rel=1e-9)
        assert row[3] + 1j * row[4] == pytest.approx(current, rel=1e-9)


def test_a_sweep_keeps_its_complex_numbers_in_a_file(run, tmp_path):
    """A .npz file holds one array a heading; nothing goes to standard output then."""
    path = tmp_path / "sweep.npz"
    status, out, _ = run("frequency", SWEEP, "--output", str(path))
    with np.load(path) as found:
        assert (0, "") == (status, out)
        assert found["node_voltage out"][1] == pytest.approx(closed_form(1e5)[0], rel=1e-9)


def test_a_run_over_time_is_a_table(run, tmp_path):
    """A .csv file of a time response begins with time_s and has a row for both ends of the run."""
    request = {"network": NETWORK, "stop_s": 1e-4, "step_s": 1e-5, "observe": OBSERVE[:1]}
    status, _, _ = run("time", request, "--output", str(tmp_path / "run.csv"), "--plot", str(tmp_path / "run.png"))
    heading, *rows = csv.reader((tmp_path / "run.csv").read_text().splitlines())
    assert (0, ["time_s", "node_voltage out"], 11) == (status, heading, len(rows))
    assert (tmp_path / "run.png").read_bytes().startswith(b"\x89PNG")


def test_a_batch_is_a_table_of_variants(run):
    """One row a variant and point; a variant that cannot exist is a row with its reason, and no failure."""
    column = {
        "coupling": {
            "windings_name": "T1",
            "label_a": "drive",
            "label_b": "rail",
            "values": {"values": {"values": [0.5, 1.5]}},
        }
    }
    request = {"network": NETWORK, "frequency": {"frequency_hz": SWEEP["frequency_hz"]}, "columns": [column]}
    status, out, _ = run("batch", request)
    rows = list(csv.DictReader(io.StringIO(out)))
    assert 0 == status
    assert ["OK", "OK", "INVALID", "INVALID"] == [row["status"] for row in rows]
    assert ["0", "0", "1", "1"] == [row["variant"] for row in rows]
    assert rows[2]["reason"]
    assert "nan" == rows[2]["node_voltage out real"]


def test_repair_prints_every_change(run):
    """The mended coupling of an impossible set is among the named values."""
    k = [1.0, 0.9, -0.9, 0.9, 1.0, 0.9, -0.9, 0.9, 1.0]
    form = {
        "self_inductance_h": {"values": {"values": [1.0, 1.0, 1.0]}},
        "coupling": {"shape": [3, 3], "values": {"values": k}},
    }
    status, out, _ = run("repair", {"windings": {"labels": ["a", "b", "c"], "coupling_form": form}})
    assert 0 == status
    assert any(line.startswith("changes[0].after ") for line in out.splitlines())


def test_identify_prints_the_set_that_was_read(run):
    """Two open readings and a short: k = sqrt(1 - 0.3 mH / 1 mH) (derived)."""
    readings = [
        {"open_inductance": {"winding": "drive", "inductance_h": 1e-3, "uncertainty_h": 1e-6}},
        {"open_inductance": {"winding": "rail", "inductance_h": 60e-6, "uncertainty_h": 1e-7}},
        {"shorted_inductance": {"winding": "drive", "shorted": ["rail"], "inductance_h": 3e-4, "uncertainty_h": 1e-6}},
    ]
    status, out, _ = run("identify", {"labels": ["drive", "rail"], "readings": readings})
    (row,) = (line for line in out.splitlines() if line.startswith("windings.coupling[0] "))
    assert 0 == status
    assert [1.0, np.sqrt(0.7)] == pytest.approx([float(word) for word in row.split()[1:]], rel=1e-9)


def test_characterize_prints_the_leakages(run):
    """Leakage of the driven winding with the other shorted: L1 - M² / L2 (derived)."""
    status, out, _ = run("characterize", {"windings": SET})
    (row,) = (line for line in out.splitlines() if line.startswith("leakage_h[0] "))
    assert 0 == status
    assert 1.0e-3 - 0.23e-3**2 / 60e-6 == pytest.approx(float(row.split()[2]), rel=1e-9)


def test_poles_are_a_table(run):
    """A row a pole, slowest first: the roots of det(R + s L) = 0 for the two meshes (derived)."""
    l1, l2, m, r1, r2 = 1.0e-3, 60e-6, 0.23e-3, 0.6, 0.03 + 50.0
    status, out, _ = run("poles", {"network": NETWORK, "observe": OBSERVE})
    heading, *rows = csv.reader(io.StringIO(out))
    found = [float(row[heading.index("pole_per_s real")]) for row in rows]
    assert 0 == status
    assert {"residue node_voltage out real", "participation T1 rail"} <= set(heading)
    assert np.roots([l1 * l2 - m * m, l1 * r2 + l2 * r1, r1 * r2])[::-1] == pytest.approx(found, rel=1e-9)


def test_what_is_read_off_the_ports_is_a_table(run):
    """A column a figure; the impedance at the one port is the meshes' own, by both commands."""
    passive = {"reference": "chassis", "elements": ELEMENTS[:2], "ports": [{"name": "p", "a": "in", "b": "chassis"}]}
    request = {"network": passive, "frequency_hz": SWEEP["frequency_hz"]}
    wanted = [1.0 / mesh_currents(frequency_hz)[0] for frequency_hz in (1e3, 1e5)]
    figures = [{"input_impedance": {"a": "p"}}, {"scattering": {"measured": {"a": "p"}, "driven": {"a": "p"}}}]
    for command, more, column in (
        ("ports", {}, "impedance_ohm p p"),
        ("port-figures", {"figures": figures}, "input_impedance p"),
    ):
        status, out, _ = run(command, request | more)
        rows = list(csv.DictReader(io.StringIO(out)))
        assert 0 == status
        assert "scattering p p real" in rows[0]
        read = [complex(float(row[f"{column} real"]), float(row[f"{column} imag"])) for row in rows]
        assert wanted == pytest.approx(read, rel=1e-9)


def test_cautions_go_to_standard_error(run):
    """What was noticed is told beside the data, never among it."""
    _, out, err = run("frequency", SWEEP)
    assert "caution" in err
    assert "caution" not in out


def test_health_and_info(run):
    """Both answer without a file."""
    assert "status SERVING" in run("health")[1]
    assert "api_version v1" in run("info")[1]


@pytest.mark.parametrize("request_text", ["", "{", '{"windings": 3}', '{"no_such_field": 1}'])
def test_a_file_that_cannot_be_understood_is_a_usage_error(run, request_text):
    """Status 2, and a message on standard error."""
    status, out, err = run("check", request_text)
    assert (2, "") == (status, out)
    assert err.startswith("interwind: ")


def test_a_refusal_has_the_status_of_its_code(run):
    """An impossible set in a solve is INVALID_ARGUMENT: 64 + 3, with reason and field."""
    impossible = json.loads(json.dumps(SWEEP))
    windings = impossible["network"]["elements"][0]["windings"]["windings"]
    windings["inductance_h"]["values"]["values"] = [1e-3, 1e-3, 1e-3, 60e-6]
    status, out, err = run("frequency", impossible)
    assert (67, "") == (status, out)
    assert "INVALID_WINDINGS" in err


def test_no_service_is_unavailable(tmp_path, capsys):
    """64 + 14 where nobody listens."""
    assert 78 == main(["health", "--address", f"unix:{tmp_path}/nobody"])
    assert "interwind: UNAVAILABLE" in capsys.readouterr().err


def test_an_unknown_ending_is_a_usage_error(run):
    """A file name must say its format."""
    assert 2 == run("check", {"windings": SET}, "--output", "answer.xls")[0]
