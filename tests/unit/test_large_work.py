"""Screening that is shared out, stopped and resumed gives what one process gives, and says what it cannot keep."""

import errno
import json
import os
import signal
import subprocess
import sys
import time
from concurrent.futures import BrokenExecutor, Executor, Future, ThreadPoolExecutor
from dataclasses import fields, replace

import numpy as np
import pytest
from click.testing import CliRunner

from actuator_sizing import files
from actuator_sizing.cli import BAD_INPUT, INTERRUPTED, commands, main
from actuator_sizing.errors import InputError, StoppedError
from actuator_sizing.report.json_results import render_json
from actuator_sizing.sizing import checkpoint as keeping
from actuator_sizing.sizing import screening
from actuator_sizing.sizing.checkpoint import Checkpoint
from actuator_sizing.sizing.comparison import compare
from actuator_sizing.sizing.workplaces import cluster, local_processes
from tests.unit.test_screening import random_case, screened


@pytest.fixture(autouse=True)
def small_shards(monkeypatch):
    """Many shards of few pairs, so that there is something to share out and to stop."""
    monkeypatch.setattr(screening, "_MOTORS_PER_BLOCK", 2)
    monkeypatch.setattr(screening, "_PAIRS_PER_SHARD", 1)
    monkeypatch.setattr(screening, "PAIRS_PER_TILE", 4)


def assert_same(one, other):
    for field in fields(one):
        a, b = getattr(one, field.name), getattr(other, field.name)
        if isinstance(a, np.ndarray) and field.name.startswith("lost"):
            continue  # a list without an order
        if isinstance(a, np.ndarray):
            assert a.tobytes() == b.tobytes(), field.name
        else:
            assert a == b, field.name


class FailingExecutor(Executor):
    """Works at once, until its workers are gone."""

    def __init__(self, good):
        self.good = good

    def submit(self, function, /, *args):
        self.good -= 1
        future = Future()
        if self.good >= 0:
            future.set_result(function(*args))
        elif self.good == -1:
            future.set_exception(BrokenExecutor())
        else:
            raise BrokenExecutor
        return future


@pytest.mark.parametrize("good", [0, 1, 5, 100])
def test_an_executor_whose_workers_die_leaves_the_rest_to_this_process(good):
    made = random_case(4)
    assert_same(screened(made, executor=FailingExecutor(good)), screened(made))


def test_processes_and_threads_give_the_same_as_one_process():
    made = random_case(4)
    alone = screened(made)
    with local_processes(2) as processes, ThreadPoolExecutor(2) as threads:
        assert_same(screened(made, executor=processes), alone)
        assert_same(screened(made, executor=threads), alone)


# -- stopping and going on ---------------------------------------------------------------------------


def stop_after(shards):
    """A progress callback that presses Ctrl-C."""
    seen = []

    def progress(_done):
        seen.append(1)
        if len(seen) == shards:
            os.kill(os.getpid(), signal.SIGINT)

    return progress


def calls_of(monkeypatch):
    calls = []
    work = screening.screen_shard
    monkeypatch.setattr(screening, "screen_shard", lambda *args: calls.append(args[1].number) or work(*args))
    return calls


@pytest.mark.parametrize("listed", [200_000, 0])
def test_a_stopped_screening_goes_on_where_it_was(tmp_path, monkeypatch, listed):
    monkeypatch.setattr(screening, "LISTED_SETS", listed)
    made = random_case(4)
    whole = screened(made)
    calls = calls_of(monkeypatch)
    kept, told = tmp_path / "kept", []
    with pytest.raises(StoppedError, match=r"Stopped after \d+ % .* Run the same command again"):
        screened(made, checkpoint=Checkpoint(kept, "case"), progress=stop_after(5))
    assert len(calls) == 5
    assert_same(screened(made, checkpoint=Checkpoint(kept, "case", told.append)), whole)
    assert sorted(calls) == list(range(len(calls)))  # each shard once
    assert "Going on where the last run stopped" in told[0]


def test_only_one_ctrl_c_is_held_back(tmp_path):
    def twice(_done):
        os.kill(os.getpid(), signal.SIGINT)
        os.kill(os.getpid(), signal.SIGINT)

    with pytest.raises(StoppedError):
        screened(random_case(4), checkpoint=Checkpoint(tmp_path / "kept", "case"), progress=twice)
    assert signal.getsignal(signal.SIGINT) is signal.default_int_handler


def test_a_checkpoint_is_of_no_use_to_another_case(tmp_path):
    kept = tmp_path / "kept"
    with pytest.raises(StoppedError):
        screened(random_case(4), checkpoint=Checkpoint(kept, "one"), progress=stop_after(2))
    before = kept.read_bytes()
    with pytest.raises(InputError, match="other inputs"):
        screened(random_case(4), checkpoint=Checkpoint(kept, "another"))
    assert kept.read_bytes() == before


@pytest.mark.parametrize("content", [b"", b"no archive", b"PK\x03\x04 half an archive"])
def test_what_is_no_checkpoint_is_said_so_and_left_alone(tmp_path, content):
    kept = tmp_path / "kept"
    kept.write_bytes(content)
    with pytest.raises(InputError, match="something else.*--checkpoint"):
        screened(random_case(4), checkpoint=Checkpoint(kept, "case"))
    assert kept.read_bytes() == content


def full_disk(*_args):
    raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


def test_a_full_disk_stops_the_keeping_but_not_the_work(tmp_path, monkeypatch):
    made = random_case(4)
    kept, told = tmp_path / "kept", []
    with pytest.raises(StoppedError):
        screened(made, checkpoint=Checkpoint(kept, "case"), progress=stop_after(2))
    before = kept.read_bytes()
    monkeypatch.setattr(keeping, "_EVERY_S", 0.0)
    monkeypatch.setattr(files, "_write_through", full_disk)
    whole = screened(made, checkpoint=Checkpoint(kept, "case", told.append))
    assert_same(whole, screened(made))
    assert sum("the disk is full" in sentence for sentence in told) == 1
    assert kept.read_bytes() == before
    assert list(tmp_path.iterdir()) == [kept]  # nothing half written is left
    with pytest.raises(StoppedError, match="keeps an earlier state"):
        screened(made, checkpoint=Checkpoint(kept, "case", told.append), progress=stop_after(1))


def test_a_finished_comparison_deletes_its_checkpoint(tmp_path):
    made = random_case(4)
    kept = tmp_path / "kept"
    with pytest.raises(StoppedError):
        compare(made, checkpoint=kept, progress=lambda _stage, done: stop_after(1)(done))
    assert kept.exists()
    resumed = compare(made, checkpoint=kept)
    assert not kept.exists()
    assert render_json(resumed) == render_json(compare(made))


def test_ctrl_c_while_sets_are_evaluated_keeps_the_screening(tmp_path):
    def progress(stage, _done):
        if stage == "evaluation":
            raise KeyboardInterrupt

    made = random_case(4)
    with pytest.raises(StoppedError, match="Stopped after the screening"):
        compare(made, checkpoint=tmp_path / "kept", progress=progress)
    assert render_json(compare(made, checkpoint=tmp_path / "kept")) == render_json(compare(made))


# -- the command line --------------------------------------------------------------------------------


def test_the_command_line_stops_with_what_it_found_and_goes_on(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(screening, "_MOTORS_PER_BLOCK", 8)
    monkeypatch.setattr(screening, "_PAIRS_PER_SHARD", 256)
    monkeypatch.setattr(screening, "PAIRS_PER_TILE", 128)
    work, calls = screening.screen_shard, []

    def interrupted(*args):
        calls.append(args)
        if len(calls) == 2:
            os.kill(os.getpid(), signal.SIGINT)
        return work(*args)

    monkeypatch.setattr(screening, "screen_shard", interrupted)
    arguments = ["compare", "catalogs_demo/tray_lift", "--json", "--checkpoint", str(tmp_path / "kept")]
    with pytest.raises(SystemExit) as left:
        main(arguments)
    assert left.value.code == INTERRUPTED
    assert "Run the same command again to go on" in capsys.readouterr().err
    with pytest.raises(SystemExit) as left:
        main(arguments)
    assert left.value.code == 0
    assert "Going on where the last run stopped" in capsys.readouterr().err


def test_a_scheduler_that_does_not_answer_is_told(monkeypatch):
    pytest.importorskip("distributed")
    monkeypatch.setattr("actuator_sizing.sizing.workplaces._PATIENCE_S", 0.5)
    run = CliRunner().invoke(
        commands, ["compare", "catalogs_demo/tray_lift", "--cluster", "tcp://127.0.0.1:9"]
    )
    assert isinstance(run.exception, InputError)
    assert "the address of a dask scheduler that answers" in str(run.exception)


@pytest.mark.parametrize("address", ["nonsense://here", "127.0.0.1:port", ""])
def test_what_is_no_address_is_told(monkeypatch, address):
    pytest.importorskip("distributed")
    monkeypatch.setattr("actuator_sizing.sizing.workplaces._PATIENCE_S", 0.5)
    with pytest.raises(InputError, match="--cluster"), cluster(address):
        pass


def test_a_cluster_without_its_package_is_told(monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    with (
        pytest.raises(InputError, match="not installed.*actuator-sizing\\[cluster\\]"),
        cluster("tcp://127.0.0.1:9"),
    ):
        pass
    assert BAD_INPUT == 2


# -- a real cluster ----------------------------------------------------------------------------------


@pytest.fixture
def scheduler(tmp_path):
    """Address of a scheduler on this machine and its two worker processes."""
    pytest.importorskip("distributed")
    where = tmp_path / "scheduler.json"
    quiet = {"stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL, "cwd": os.getcwd()}
    python = [sys.executable, "-m"]
    started = [
        subprocess.Popen(
            [*python, "distributed.cli.dask_scheduler", "--host", "127.0.0.1", "--port", "0", "--no-dashboard",
             "--scheduler-file", str(where)], **quiet)
    ]  # fmt: skip
    started += [
        subprocess.Popen(
            [*python, "distributed.cli.dask_worker", "--scheduler-file", str(where), "--no-nanny", "--nthreads",
             "1", "--host", "127.0.0.1", "--no-dashboard", "--local-directory", str(tmp_path / f"worker {n}")],
            **quiet)
        for n in range(2)
    ]  # fmt: skip
    deadline = time.monotonic() + 60.0
    while not where.exists() or not where.read_text().strip():
        assert time.monotonic() < deadline, "the scheduler did not start"
        time.sleep(0.05)
    yield json.loads(where.read_text())["address"], started[1:]
    for process in started[::-1]:
        process.kill()
        process.wait()


def test_a_cluster_gives_the_same_even_if_a_worker_dies(scheduler):
    from distributed import Client

    address, workers = scheduler
    made = random_case(4)
    alone = screened(made)
    with Client(address, set_as_default=False) as client:
        client.wait_for_workers(2, timeout=60)
    with cluster(address) as executor:
        assert_same(screened(made, executor=executor), alone)
    died = []

    def kill_one(_done):
        if not died:
            workers[0].kill()
            died.append(workers[0].wait())

    with cluster(address) as executor:
        assert_same(screened(made, executor=executor, progress=kill_one), alone)
    assert died == [-signal.SIGKILL]
    with cluster(address) as executor:
        assert render_json(compare(made, executor=executor)) == render_json(compare(replace(made)))
