"""A real Dask scheduler and worker processes: the same results in the same order, workers that are killed."""

from __future__ import annotations

import json
import os
import signal
import sys
from collections.abc import Iterator
from contextlib import ExitStack, closing
from pathlib import Path

import pytest
from distributed import Client

from audit.outputs import small, small_csv
from fleet.helping import TESTS, Command, Running, all_done, book, index, leftovers, text_tasks, wait_for
from fleet.kinds import KILL
from lowpoint.errors import LowpointError
from lowpoint.faces import cli
from lowpoint.fleet import cluster
from lowpoint.fleet.cluster import Cluster
from lowpoint.fleet.pools import Finished
from lowpoint.fleet.remote import Errand, run_errand
from lowpoint.fleet.tasks import Task
from survey_lists import GOOD, HEADINGS, write_csv, write_xlsx

Streams = pytest.CaptureFixture[str]


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The address of a scheduler with two workers, each guarded by a nanny that starts it anew when it dies."""
    folder = tmp_path_factory.mktemp("cluster")
    known = folder / "scheduler.json"
    env = {**os.environ, "PYTHONPATH": str(TESTS), "DASK_DISTRIBUTED__ADMIN__LOW_LEVEL_LOG_LENGTH": "0"}
    place = ("--host", "127.0.0.1")

    def start(what: str, *words: str) -> Running:
        said = folder / what
        said.mkdir()
        module = f"distributed.cli.dask_{what}"
        return Running(["--no-dashboard", *place, *words], said, module, cwd=folder, env=env)

    with ExitStack() as stack:
        stack.enter_context(start("scheduler", "--port", "0", "--scheduler-file", str(known)))
        wait_for(known.exists, "the scheduler")
        workers = ("--scheduler-file", str(known), "--nworkers", "2", "--nthreads", "1", "--memory-limit", "0")
        guard = stack.enter_context(start("worker", *workers))
        found = wait_for(lambda: _address(known), "its address")
        with Client(found, set_as_default=False) as client:
            client.wait_for_workers(2, timeout=30)
        yield found
        guard.process.send_signal(signal.SIGINT)  # so that the nannies take their workers with them
        guard.end()


def _address(known: Path) -> str:
    try:
        return str(json.loads(known.read_text())["address"])
    except ValueError:  # being written
        return ""


@pytest.fixture
def pool(address: str) -> Iterator[Cluster]:
    with closing(Cluster(address, full=True)) as made:
        yield made


def begun(pool: Cluster, marker: Path) -> tuple[list[Finished], int]:
    """Until the work that leaves a marker has begun: what was finished by then, and the process at that work."""
    found: list[Finished] = []

    def seen() -> int:
        found.extend(pool.collect(0.1))
        return int((marker.exists() and marker.read_text()) or 0)

    pid = wait_for(seen, "the work to begin")
    return found, int(pid)


def test_the_command_gives_the_same_as_here_in_the_same_order(
    address: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams
) -> None:
    monkeypatch.chdir(tmp_path)
    for n in range(6):
        book(Path(f"in/{n}.xlsx"), p1=9.0 + n)
    Path("in/bad.xlsx").write_text("tag,p1\n")
    assert cli.main(["recalc", "in", "-o", "here", "--json"]) == 1
    here = json.loads(capsys.readouterr().out.replace("here", "there"))
    assert cli.main(["recalc", "in", "-o", "there", "--json", "--dask", address, "--trail", "trail.jsonl"]) == 1
    there = json.loads(capsys.readouterr().out)
    for one in (*here, *there):
        for name in ("seconds", "evaluation_seconds"):
            one.pop(name, None)
    assert there == here
    for path in Path("here").iterdir():
        assert path.read_bytes() == (Path("there") / path.name).read_bytes()
    assert not Path("there/bad.xlsx").exists()
    trail = [json.loads(line) for line in Path("trail.jsonl").read_text(encoding="utf-8").splitlines()]
    assert len(trail) == 7
    assert len({line["worker"] for line in trail if line["result"] == "done"}) == 2
    assert list(trail[0]["written"]) == [str(Path("there") / Path(trail[0]["book"]).name)]


def test_lists_and_sheets_give_the_same_as_here(
    address: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams
) -> None:
    monkeypatch.chdir(tmp_path)
    for folder in ("lists", "offers"):
        Path(folder).mkdir()
    write_csv(Path("lists/a.csv"), HEADINGS, [GOOD])
    write_xlsx(Path("lists/b.xlsx"), HEADINGS, [GOOD])
    small(Path("offers"), "a.xlsx", sigma=3.25)
    small_csv(Path("offers"), "b.csv")
    assert cli.main(["audit", "offers/a.xlsx", "--write-layout", "v.toml"]) == 1
    for words in (["survey", "lists", "--draws", "5"], ["audit", "offers", "--layout", "v.toml"]):
        said = []
        for where in ([], ["--dask", address]):
            capsys.readouterr()
            assert cli.main([*words, "-o", "out", "--overwrite", "--json", *where]) in (0, 1)
            files = {path.name: path.read_bytes() for path in sorted(Path("out").iterdir())}
            said.append((json.loads(capsys.readouterr().out), files))
        assert len(said[0][0]) == 2
        assert said[0] == said[1]


def test_in_place_and_since_last(address: str, tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "in" / "a.xlsx")
    words = ["recalc", str(tmp_path / "in"), "--in-place", "--since-last", "--dask", address]
    assert cli.main(words) == 0
    assert index(source) == 1.996  # by hand: (10 - 0.02)/(10 - 5)
    assert cli.main(words) == 0
    assert "1 unchanged and skipped" in capsys.readouterr().out


def test_a_book_that_brings_workers_down_takes_two_and_the_others_go_on(tmp_path: Path, pool: Cluster) -> None:
    tasks = text_tasks(tmp_path, ["die", "two", "three", "four"])
    found = all_done(pool, tasks)
    assert [found[n].attempts for n in range(4)] == [2, 1, 1, 1]
    assert "the cluster's worker that had it ended without an answer, 2 times" in found[0].outcome.errors[0]
    assert not tasks[0].targets[0].exists()
    assert [tasks[n].targets[0].read_text() for n in (1, 2, 3)] == ["TWO", "THREE", "FOUR"]


def test_a_worker_that_is_killed_at_its_work_from_outside(tmp_path: Path, pool: Cluster) -> None:
    marker = tmp_path / "marker"
    tasks = text_tasks(tmp_path, [f"sleep once {marker}", "two"])
    for number, task in enumerate(tasks):
        pool.submit(number, task)
    found, pid = begun(pool, marker)
    os.kill(pid, KILL)
    wait_for(lambda: found.extend(pool.collect(0.5)) or len(found) == 2, "both")
    by_number = {done.number: done for done in found}
    assert by_number[0].attempts == 2
    assert by_number[1].attempts == 1
    assert tasks[0].targets[0].exists()


def test_our_bug_far_away(tmp_path: Path, pool: Cluster) -> None:
    found = all_done(pool, text_tasks(tmp_path, ["bug"]))
    assert found[0].outcome.code == 70
    assert f"{tmp_path / '000.txt'}: this is our bug (ZeroDivisionError" in found[0].outcome.errors[0]


def test_a_kind_that_the_workers_do_not_know(tmp_path: Path, pool: Cluster) -> None:
    source = tmp_path / "a.txt"
    source.write_text("a")
    found = all_done(pool, [Task("fleet.nowhere:work", source)])
    assert found[0].outcome.failed
    assert "ModuleNotFoundError" in found[0].outcome.errors[0]


def test_a_book_that_takes_too_long_is_given_up(address: str, tmp_path: Path) -> None:
    marker = tmp_path / "marker"
    with closing(Cluster(address, full=False, limit=1.0)) as pool:
        found = all_done(pool, text_tasks(tmp_path, [f"sleep once {marker}", "two", "three"]))
    marker.write_text("wake")  # for the tests that follow
    assert "took longer than 1 s and was given up" in found[0].outcome.errors[0]
    assert not found[1].outcome.failed
    assert not found[2].outcome.failed


def test_files_that_are_not_there_open_or_changed_in_the_meantime(tmp_path: Path, pool: Cluster) -> None:
    gone = Task("recalc", tmp_path / "gone.xlsx", (tmp_path / "out.xlsx",))
    opened = Task("recalc", book(tmp_path / "a.xlsx"), (tmp_path / "b.xlsx",))
    (tmp_path / "~$b.xlsx").write_bytes(b"\x04Anna" + b" " * 49)
    marker = tmp_path / "marker"
    (moving,) = text_tasks(tmp_path, [f"sleep once {marker}"])
    moving = Task(moving.kind, moving.source, (moving.source,))
    pool.submit(2, moving)
    found, _ = begun(pool, marker)
    moving.source.write_text("another text")
    marker.write_text("wake")
    wait_for(lambda: found.extend(pool.collect(0.5)) or found, "its end")
    assert "was changed by someone else in the meantime" in found[0].outcome.errors[0]
    assert moving.source.read_text() == "another text"
    others = all_done(pool, [gone, opened])
    assert "gone.xlsx: must be an existing file" in others[0].outcome.errors[0]
    assert "b.xlsx: is open: Anna has it" in others[1].outcome.errors[0]


def test_a_signal_ends_it_cleanly(address: str, command: Command, tmp_path: Path) -> None:
    first = book(tmp_path / "in" / "000.xlsx", rows=400)
    for n in range(1, 60):
        (tmp_path / "in" / f"{n:03}.xlsx").write_bytes(first.read_bytes())
    running = command("recalc", tmp_path / "in", "-o", tmp_path / "out", "--dask", address)
    wait_for(lambda: len(list((tmp_path / "out").glob("*.xlsx"))) >= 3, "three books")
    running.process.send_signal(signal.SIGTERM if sys.platform != "win32" else signal.CTRL_BREAK_EVENT)
    assert running.end() == 130
    assert "Traceback" not in running.out + running.err
    assert "interrupted" in running.err
    assert len({path.read_bytes() for path in (tmp_path / "out").glob("*.xlsx")}) == 1
    assert leftovers(tmp_path) == []


def test_no_scheduler_and_wrong_words(tmp_path: Path, capsys: Streams) -> None:
    source = str(book(tmp_path / "a.xlsx"))
    assert cli.main(["recalc", source, "--dask", "nonsense://x"]) == 2
    assert "--dask nonsense://x: must be the address of a Dask scheduler that answers" in capsys.readouterr().err
    assert cli.main(["recalc", source, "--dask", "tcp://127.0.0.1:1", "--jobs", "2"]) == 2
    assert "must stand without --jobs" in capsys.readouterr().err


def test_another_version_there_is_refused(tmp_path: Path) -> None:
    (task,) = text_tasks(tmp_path, ["one"])
    sent = run_errand(Errand(task, b"one", False, "0.0.0"))
    assert sent.files == {}
    assert "and 0.0.0 asks it" in sent.outcome.errors[0]


def test_a_scheduler_that_goes_away_is_told(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setattr(cluster, "CONNECT", 2.0)
    known = tmp_path / "scheduler.json"
    said = tmp_path / "said"
    said.mkdir()
    words = ["--no-dashboard", "--host", "127.0.0.1", "--port", "0", "--scheduler-file", str(known)]
    with Running(words, said, "distributed.cli.dask_scheduler") as scheduler:
        found = wait_for(lambda: known.exists() and _address(known), "its address")
        pool = Cluster(found, full=False)
        try:
            scheduler.process.kill()
            with pytest.raises(LowpointError, match="the scheduler does not answer any more"):  # noqa: PT012
                for _ in range(200):
                    pool.collect(0.1)
        finally:
            pool.close()
