"""Worker processes: the order of results, workers that die at any moment, hang, or have done enough."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest

from fleet.helping import all_done, leftovers, text_tasks, wait_for
from fleet.kinds import KILL
from lowpoint.errors import LowpointError
from lowpoint.fleet import processes
from lowpoint.fleet.pools import Here
from lowpoint.fleet.processes import Processes
from lowpoint.fleet.running import Records, results
from lowpoint.fleet.stopping import Stopper
from lowpoint.fleet.working import peak_memory


@pytest.fixture
def pool() -> Iterator[Processes]:
    with closing(Processes(2, full=True)) as made:
        yield made


def test_a_book_that_brings_its_worker_down_is_tried_twice_and_the_others_go_on(
    tmp_path: Path, pool: Processes
) -> None:
    tasks = text_tasks(tmp_path, ["one", "die", "two", "three"])
    found = all_done(pool, tasks)
    assert [found[n].attempts for n in range(4)] == [1, 2, 1, 1]
    bad = found[1].outcome
    assert bad.failed
    assert bad.code == 2
    assert "001.txt: the worker process that had it ended without an answer" in bad.errors[0]
    assert "2 times" in bad.errors[0]
    if sys.platform != "win32":
        assert "signal 9, SIGKILL" in bad.errors[0]
    assert not tasks[1].targets[0].exists()
    assert [tasks[n].targets[0].read_text() for n in (0, 2, 3)] == ["ONE", "TWO", "THREE"]


def test_a_worker_that_dies_once_costs_nothing(tmp_path: Path, pool: Processes) -> None:
    tasks = text_tasks(tmp_path, [f"die once {tmp_path / 'marker'}", "two"])
    found = all_done(pool, tasks)
    assert found[0].attempts == 2
    assert not found[0].outcome.failed
    assert tasks[0].targets[0].exists()


def test_a_worker_that_leaves_with_an_exit_code(tmp_path: Path, pool: Processes) -> None:
    found = all_done(pool, text_tasks(tmp_path, ["leave"]))
    assert "exit code 3" in found[0].outcome.errors[0]


def test_idle_workers_that_are_killed_are_replaced(tmp_path: Path, pool: Processes) -> None:
    all_done(pool, text_tasks(tmp_path, ["one", "two"]))
    for worker in pool._workers:
        os.kill(worker.process.pid or 0, KILL)
        worker.process.join()
    found = all_done(pool, text_tasks(tmp_path, ["three", "four", "five"]))
    assert [found[n].outcome.data["said"] for n in range(3)] == ["three", "four", "five"]


def test_killed_while_it_writes_leaves_the_old_file_and_nothing_else(tmp_path: Path, pool: Processes) -> None:
    tasks = text_tasks(tmp_path, ["die writing"])
    tasks[0].targets[0].write_text("old")
    assert all_done(pool, tasks)[0].outcome.failed
    assert tasks[0].targets[0].read_text() == "old"
    assert leftovers(tmp_path) == []


def test_closing_ends_what_is_at_work_and_clears_up(tmp_path: Path) -> None:
    pool = Processes(2, full=False)
    with closing(pool):
        tasks = text_tasks(tmp_path, ["sleep writing", "sleep"])
        for number, task in enumerate(tasks):
            pool.submit(number, task)

        def begun() -> list[str]:
            assert pool.collect(0.1) == []
            return leftovers(tmp_path)

        wait_for(begun, "a temporary file")
        workers = [worker.process for worker in pool._workers]
    assert all(worker.exitcode is not None for worker in workers)
    assert leftovers(tmp_path) == []
    assert list((tmp_path / "out").iterdir()) == []


def test_a_book_that_takes_too_long_is_given_up(tmp_path: Path) -> None:
    with closing(Processes(1, full=False, limit=0.5)) as pool:
        found = all_done(pool, text_tasks(tmp_path, ["sleep", "two"]))
    assert "took longer than 0.5 s" in found[0].outcome.errors[0]
    assert not found[1].outcome.failed


def test_workers_are_replaced_after_so_many_books_and_so_much_memory(tmp_path: Path) -> None:
    with closing(Processes(1, full=True, most_books=2)) as pool:
        found = all_done(pool, text_tasks(tmp_path, list("abcde")))
    pids = [found[n].outcome.data["pid"] for n in range(5)]
    assert pids[0] == pids[1] != pids[2] == pids[3] != pids[4]
    if not peak_memory():
        return  # a system that does not tell: books alone count there
    with closing(Processes(1, full=True, most_memory=1)) as pool:
        found = all_done(pool, text_tasks(tmp_path, list("abc")))
    assert len({found[n].outcome.data["pid"] for n in range(3)}) == 3


def test_peak_memory_is_that_of_this_process() -> None:
    before = peak_memory()
    block = bytearray(64 << 20)
    block[::4096] = b"x" * len(block[::4096])
    after = peak_memory()
    assert after == before == 0 or after >= len(block)


def test_our_bug_is_told_and_stops_nobody(tmp_path: Path, pool: Processes) -> None:
    found = all_done(pool, text_tasks(tmp_path, ["bug", "two"]))
    assert found[0].outcome.code == 70
    assert "this is our bug (ZeroDivisionError: by zero)" in found[0].outcome.errors[0]
    assert not found[1].outcome.failed


def test_workers_that_cannot_start_are_told(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setattr(processes, "serve", sys.exit)  # every worker ends before it has begun
    with (
        closing(Processes(1, full=False)) as pool,
        pytest.raises(LowpointError, match="worker processes must start, but ended before"),
    ):
        all_done(pool, text_tasks(tmp_path, ["one"]))


@pytest.mark.parametrize("workers", [0, 1, 3])
def test_results_come_in_the_order_of_the_tasks(tmp_path: Path, workers: int) -> None:
    texts = ["die once " + str(tmp_path / "marker") if workers and n == 0 else f"text {n}" for n in range(12)]
    tasks = text_tasks(tmp_path, texts)
    pool = Processes(workers, full=True) if workers else Here(full=True)
    counts: list[int] = []
    with Stopper() as stopper, closing(pool), Records(None, False, pytest.fail) as records:
        found = list(results(tasks, pool, records, stopper, counts.append))
    assert [result.outcome.data["said"] for result in found] == texts
    assert counts == sorted(counts)
    assert counts[-1] == 12


def test_a_worker_whose_parent_is_gone_ends(tmp_path: Path) -> None:
    pool = Processes(1, full=False)
    all_done(pool, text_tasks(tmp_path, ["one"]))
    process = pool._workers[0].process
    pool._workers[0].pipe.close()  # what the system does when the one in front is killed
    process.join(10)
    assert process.exitcode == 0
    pool._workers.clear()
