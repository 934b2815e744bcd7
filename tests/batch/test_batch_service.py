"""A batch through the real server: submitted, watched, streamed, summarized, cancelled, resumed."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator

import link
import numpy as np
import pytest

import interwind as iw
from interwind.calling import Deadline
from interwind.v1 import batch_service_pb2 as messages
from interwind_service.testing import RunningService, wait_until

COUNT = 60


def columns(count: int = COUNT, seed: int = 5):
    rng = np.random.default_rng(seed)
    coupling = rng.uniform(0.05, 0.5, count)
    coupling[7] = 1.5  # no windings have it
    return [
        iw.VaryCoupling("T1", ("tx", "rx"), coupling), iw.Vary("load", "resistance_ohm", rng.uniform(5, 30, count))
    ]  # fmt: skip


ANALYSIS = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)


@pytest.fixture(scope="module")
def server(tmp_path_factory) -> Iterator[RunningService]:
    """A server with two workers and a state folder."""
    folder = tmp_path_factory.mktemp("state")
    with RunningService("--workers", "2", "--state-dir", str(folder), "--grace-s", "1") as running:
        yield running


@pytest.fixture
def solver(server) -> Iterator[iw.Client]:
    """A client of it."""
    with iw.connect(server.address) as client:
        yield client


def test_rows_are_there_with_status_and_reason(solver):
    """Every row meets the closed form; the one that cannot exist is INVALID, says why, and holds NaN."""
    vary = columns()
    batch = solver.submit_batch(link.network(), ANALYSIS, vary)
    seen = list(batch.watch())
    assert seen[-1].done
    assert [x.sequence for x in seen] == sorted({x.sequence for x in seen})
    result = batch.result()
    assert [iw.VariantStatus.INVALID] == list(result.status[~result.ok])
    assert (7, True) == (int(np.flatnonzero(~result.ok)[0]), "1.5" in result.reason[7])
    assert all(reason == "" for reason in result.reason[result.ok])
    for key, expected in zip(link.OBSERVE, link.closed_form(vary[0].values, vary[1].values), strict=True):
        assert np.allclose(result.table[key][result.ok], expected[result.ok], rtol=1e-11, atol=0.0)
        assert np.isnan(result.table[key][7]).all()
    assert np.array_equal(link.FREQUENCY_HZ, result.points)


def test_rows_come_in_order(solver):
    """Iteration yields each row once, with the numbers of the whole result."""
    batch = solver.submit_batch(link.network(), ANALYSIS, columns())
    rows = list(batch)
    assert list(range(COUNT)) == [row.index for row in rows]
    result = batch.result()
    for row in rows:
        assert (row.status, row.reason) == (result.status[row.index], result.reason[row.index])
        for key, numbers in row.table.items():
            assert np.array_equal(numbers, result.table[key][row.index], equal_nan=True)


def test_request_id_makes_submission_repeatable(solver):
    """The same id and content is the same batch for any client; another content is refused."""
    first = solver.submit_batch(link.network(), ANALYSIS, columns(), request_id="one")
    with iw.connect(solver.address) as other:
        again = other.submit_batch(link.network(), ANALYSIS, columns(), request_id="one")
        assert first.id == again.id
        assert first.id in [progress.batch_id for progress in other.batches()]
        assert other.batch(first.id).result().ok.sum() == COUNT - 1
    with pytest.raises(iw.InvalidRequest) as caught:
        solver.submit_batch(link.network(), ANALYSIS, columns(seed=6), request_id="one")
    assert "REQUEST_ID_REUSED" == caught.value.reason


def test_forecast_stores_nothing(solver):
    """The size of the results is exact, the time positive, and no batch is there afterwards."""
    before = [progress.batch_id for progress in solver.batches()]
    forecast = solver.forecast_batch(link.network(), ANALYSIS, columns())
    assert COUNT * 100 * len(link.OBSERVE) * 16 == forecast.result_bytes
    assert forecast.duration_s > 0.0
    assert before == [progress.batch_id for progress in solver.batches()]


def test_summary_is_that_of_the_rows(solver):
    """Quantiles and extreme rows over the OK rows, against NumPy's on the streamed table."""
    batch = solver.submit_batch(link.network(), ANALYSIS, columns())
    with pytest.raises(iw.NotReady):
        solver.submit_batch(
            link.network(), iw.TimeAnalysis(1e-3, 1e-7), columns(400), request_id="slow"
        ).summary()  # fmt: skip
    solver.submit_batch(link.network(), iw.TimeAnalysis(1e-3, 1e-7), columns(400), request_id="slow").delete()
    result = batch.result()
    summary = batch.summary(levels=(0.0, 0.1, 0.5, 1.0), extreme_count=3)
    assert COUNT - 1 == summary.row_count
    for key in link.OBSERVE:
        size = np.abs(result.table[key])
        expected = np.quantile(size[result.ok], [0.0, 0.1, 0.5, 1.0], axis=0)
        assert np.allclose(expected, summary.quantiles[key], rtol=1e-14)
        peaks = size.max(axis=1)
        order = np.argsort(np.where(result.ok, peaks, -1.0))[::-1]
        assert order[:3].tolist() == summary.highest_rows[key].tolist()
        assert order[: COUNT - 1][::-1][:3].tolist() == summary.lowest_rows[key].tolist()
        assert np.array_equal(peaks[summary.highest_rows[key]], summary.highest[key])


def test_check_analysis_tells_eigenvalues_of_impossible_sets_too(solver):
    """Two windings: the eigenvalues of the coupling matrix are 1 ± k, whatever the verdict."""
    k = np.array([0.5, -0.9, 1.25])
    result = solver.submit_batch(
        link.network(), iw.CheckAnalysis(), [iw.VaryCoupling("T1", ("tx", "rx"), k)]
    ).result()  # fmt: skip
    assert [True, True, False] == result.ok.tolist()
    expected = np.sort(np.stack([1.0 - k, 1.0 + k], axis=1), axis=1)
    assert np.allclose(expected, result.table["eigenvalues"], rtol=1e-14, atol=1e-15)


def test_drawn_sets_all_exist(solver):
    """A tolerance study of a tight pair: 200 sets drawn by the service, every row OK."""
    sample = iw.SampleWindings("T1", 200, spread=0.2, self_spread=0.02, seed=9)
    batch = solver.submit_batch(link.network(0.9), ANALYSIS, [sample])
    assert batch.result().ok.all()
    assert 200 == batch.summary().row_count


def test_large_columns_travel_beside_the_request(solver):
    """Columns beyond one message are uploaded by their hash; the rows are the same."""
    count = 20_000
    load = np.linspace(5.0, 30.0, count)
    load.setflags(write=False)
    matrices = np.broadcast_to(link.network().element("T1").windings.inductance_h, (count, 2, 2))
    analysis = iw.FrequencyAnalysis(link.FREQUENCY_HZ[:1], link.OBSERVE[:1])
    vary = [iw.Vary("load", "resistance_ohm", load), iw.VaryMatrix("T1", matrices)]
    result = solver.submit_batch(link.network(), analysis, vary).result()
    expected, _ = link.closed_form(np.full(count, link.COUPLING), load, link.FREQUENCY_HZ[:1])
    assert np.allclose(expected, result.table[link.OBSERVE[0]], rtol=1e-11, atol=0.0)


@pytest.mark.parametrize(
    ("analysis", "path"),
    [
        (iw.FrequencyAnalysis(link.FREQUENCY_HZ, [iw.NodeVoltage("nowhere")]), None),
        (iw.TimeAnalysis(1.05, 0.1), "analysis.stop_s"),
        (iw.TimeAnalysis(0.3, 1e-6), "time_s"),
        (iw.CheckAnalysis("T2"), "windings_name"),
    ],
)
def test_what_no_variant_can_be_asked_is_refused_at_once(solver, analysis, path):
    """What cannot be understood is an error of the submission; what the network lacks, of each row with its reason."""
    if path is None:
        result = solver.submit_batch(link.network(), analysis, columns()).result()
        assert not result.ok.any()
        assert "nowhere" in result.reason[0]
        return
    with pytest.raises(iw.InvalidRequest) as caught:
        solver.submit_batch(link.network(), analysis, columns())
    assert path == caught.value.violations[0].field


def test_unknown_batch_is_not_found(solver):
    """Every method says so."""
    batch = solver.batch("0" * 16)
    for method in (batch.progress, batch.cancel, batch.delete, batch.result, batch.summary, batch.done):
        with pytest.raises(iw.NotFound):
            method()


def test_cancel_frees_the_workers(solver, server):
    """A long batch ends at once as CANCELLED; rows without numbers say so; workers are idle soon after."""
    vary = [iw.Vary("load", "resistance_ohm", np.linspace(5.0, 30.0, 400))]
    batch = solver.submit_batch(link.network(), iw.TimeAnalysis(2e-2, 2e-7), vary)
    progress = batch.cancel()
    assert (True, 400) == (progress.done, progress.done_count)
    result = batch.result()
    assert (result.status == iw.VariantStatus.CANCELLED).sum() == progress.cancelled_count > 0
    assert wait_until(lambda: solver.server_info().busy_worker_count == 0, 5.0) < 5.0


def test_second_server_is_kept_out(tmp_path):
    """Two servers never share a state folder; the second says so and ends."""
    with RunningService("--workers", "1", "--state-dir", str(tmp_path)):
        with pytest.raises(RuntimeError, match="in use by another server"):
            RunningService("--workers", "1", "--state-dir", str(tmp_path))


def parts(solver, batch, **fields):
    """The raw parts of a stream of rows."""
    request = messages.StreamBatchResultsRequest(batch_id=batch.id, **fields)
    path = "/interwind.v1.BatchService/StreamBatchResults"
    return list(solver._caller.stream(path, request, messages.StreamBatchResultsResponse, Deadline(30.0)))


def test_rows_are_streamed_from_any_row_on(solver):
    """A stream begins with the chunk that holds the row asked for, and its bytes match the checksum it states."""
    batch = solver.submit_batch(link.network(), iw.CheckAnalysis(), columns()[:1])
    whole = batch.result()
    for start in (0, 13, COUNT - 1):
        header, head, *data = parts(solver, batch, start_row=start)
        assert COUNT == header.header.variant_count
        assert head.chunk.first_row <= start < head.chunk.first_row + head.chunk.row_count
        own = b"".join(part.data.data for part in data if part.WhichOneof("part") == "data")[: head.chunk.size_bytes]
        assert head.chunk.sha256 == hashlib.sha256(own).hexdigest()
        values = np.frombuffer(own, "<f8").reshape(head.chunk.row_count, 2)
        rows = slice(head.chunk.first_row, head.chunk.first_row + head.chunk.row_count)
        assert np.array_equal(values, whole.table["eigenvalues"][rows])
    (only,) = parts(solver, batch, start_row=COUNT)
    assert "header" == only.WhichOneof("part")
    with pytest.raises(iw.OutOfRange):
        parts(solver, batch, start_row=COUNT + 1)


def test_an_unfinished_batch_is_refused_unless_one_waits(solver):
    """Without ``wait`` the rows of a batch that is not done are NotReady; the next move is named."""
    vary = [iw.Vary("load", "resistance_ohm", np.linspace(5.0, 30.0, 400))]
    batch = solver.submit_batch(link.network(), iw.TimeAnalysis(2e-2, 2e-7), vary)
    with pytest.raises(iw.NotReady, match="set wait"):
        parts(solver, batch)
    batch.delete()


def test_another_token_sees_no_batch(tmp_path):
    """Batches belong to the token that submitted them."""
    tokens = tmp_path / "tokens"
    tokens.write_text("one-token-of-many\nanother-token\n")
    tokens.chmod(0o600)
    with RunningService("--workers", "1", "--token-file", str(tokens)) as server:
        with iw.connect(server.address, token="one-token-of-many") as mine:
            batch = mine.submit_batch(link.network(), iw.CheckAnalysis(), columns()[:1])
            assert batch.result().ok.sum() == COUNT - 1
            with iw.connect(server.address, token="another-token") as theirs:
                assert [] == list(theirs.batches())
                with pytest.raises(iw.NotFound):
                    theirs.batch(batch.id).progress()
            assert [batch.id] == [progress.batch_id for progress in mine.batches()]
