"""Disks, permissions and names as they come: a sentence, the right exit code, and no file harmed.

Permissions bite a common user only, so the command gives up the superuser's means to override them.
A full disk is played by a limit on the size of a file (RLIMIT_FSIZE), and is real where a small memory disk may be
mounted. Exit codes: 0 done, 1 findings or failed items, 2 misuse; 70 would be our bug.
"""

from __future__ import annotations

import contextlib
import os
import shutil
import signal
import socket
import subprocess
import sys
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

import pytest

from book.lists import bare, formula, number
from hostile.running import common, run, unstuck
from lowpoint.faces.cli import main
from survey_lists import GOOD, HEADINGS, write_csv, write_xlsx

pytestmark = pytest.mark.skipif(os.name == "nt", reason="permissions, limits and special files of POSIX systems")
CELLS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03), "E1": formula("LP_SIGMA(A1,B1,C1)", "1")}

Words = Callable[[Path, Path], list[object]]
"""The words of a command by the folder of its inputs and the folder of its outputs."""
WRITERS: dict[str, Words] = {
    "recalc": lambda ins, outs: ["recalc", ins / "book.xlsx", "-o", outs / "new.xlsx"],
    "values": lambda ins, outs: ["recalc", ins / "book.xlsx", "--values", "-o", outs / "new.xlsx"],
    "survey": lambda ins, outs: ["survey", ins / "items.xlsx", "-o", outs / "new.xlsx", "--overwrite", "--draws", "0",
                                 "--no-remedies"],
    "page": lambda ins, outs: ["survey", ins / "items.csv", "--html", outs / "new.html", "--overwrite", "--draws", "0",
                               "--no-remedies"],
    "explain": lambda ins, outs: ["explain", ins / "items.csv", "21-FCV-110", "-o", outs / "new.txt", "--overwrite"],
    "starter": lambda ins, outs: ["starter", "list", "-o", outs / "new.xlsx", "--overwrite"],
    "sheet": lambda ins, outs: ["starter", "sheet", "-o", outs / "new.xlsx", "--overwrite"],
}  # fmt: skip
READERS: dict[str, Callable[[Path, Path], list[object]]] = {
    "recalc": lambda path, out: ["recalc", path, "-o", out / f"new{path.suffix}"],
    "survey": lambda path, out: ["survey", path, "--draws", "0", "--no-remedies"],
    "compare": lambda path, out: ["compare", path, path],
    "explain": lambda path, out: ["explain", path, "21-FCV-110"],
}


@pytest.fixture
def folder() -> Iterator[Path]:
    """A folder with inputs in it that a common user may enter (those of the tests are closed to others)."""
    import tempfile

    with tempfile.TemporaryDirectory() as made:
        path = Path(made)
        path.chmod(0o755)
        bare(path / "book.xlsx", CELLS)
        write_xlsx(path / "items.xlsx", HEADINGS, [GOOD])
        write_csv(path / "items.csv", HEADINGS, [GOOD])
        for child in path.iterdir():
            child.chmod(0o644)
        (path / "out").mkdir(mode=0o777)
        (path / "out").chmod(0o777)
        yield path
        (path / "out").chmod(0o777)


def sentence(done: subprocess.CompletedProcess[str], *words: str, code: int = 2) -> str:
    """What the command said: one message that ends properly, no traceback, this exit code."""
    assert "Traceback" not in done.stderr, done.stderr
    assert "our bug" not in done.stderr, done.stderr
    assert done.returncode == code, (done.returncode, done.stdout, done.stderr)
    assert done.stderr.strip().endswith((".", "!", "?")), done.stderr
    for word in words:
        assert word.casefold() in done.stderr.casefold(), done.stderr
    return done.stderr


def left(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


# --- full disks -------------------------------------------------------------------------------------------------


def _small_files() -> None:
    import resource

    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)  # the write then fails as on a full disk
    resource.setrlimit(resource.RLIMIT_FSIZE, (700, 700))


@pytest.mark.parametrize("name", WRITERS)
def test_a_disk_that_takes_no_more(folder: Path, name: str) -> None:
    words = WRITERS[name](folder, folder / "out")
    target = Path(str(next(w for w in words if str(w).startswith(str(folder / "out")))))
    target.write_bytes(b"what was there")
    sentence(run(*words, folder=folder, before=_small_files), "disk is full")
    assert target.read_bytes() == b"what was there"
    assert left(folder / "out") == [target.name]


@pytest.fixture
def small_disk(folder: Path) -> Iterator[Path]:
    """A memory disk of 64 KB, half of it full."""
    place = folder / "out"
    mounted = shutil.which("mount") and subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=64k", "tmpfs", str(place)], capture_output=True, check=False
    )
    if not mounted or mounted.returncode:
        yield place  # the next test says what it needs
        return
    try:
        yield place
    finally:
        subprocess.run(["umount", str(place)], check=True)


def test_a_disk_that_is_really_full(folder: Path, small_disk: Path) -> None:
    """Where no memory disk can be mounted, a limit on the size of files stands in for it."""
    real = os.path.ismount(small_disk)
    target = small_disk / "new.xlsx"
    target.write_bytes(b"what was there")
    if real:
        with contextlib.suppress(OSError), (small_disk / "filler").open("wb", buffering=0) as filler:
            while filler.write(bytes(4096)):
                pass
    for words in (["starter", "list", "-o", target, "--overwrite"], WRITERS["recalc"](folder, small_disk)):
        sentence(run(*words, folder=folder, before=None if real else _small_files), "the disk is full")
        assert target.read_bytes() == b"what was there"
    assert left(small_disk) == (["filler", "new.xlsx"] if real else ["new.xlsx"])


# --- permissions ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["recalc", "survey", "starter"])
def test_a_folder_that_is_read_only(folder: Path, name: str) -> None:
    (folder / "out").chmod(0o555)
    sentence(run(*WRITERS[name](folder, folder / "out"), folder=folder, before=common), "cannot be written")
    assert left(folder / "out") == []


def test_in_place_in_a_folder_that_is_read_only(folder: Path) -> None:
    book = folder / "out" / "book.xlsx"
    before = shutil.copyfile(folder / "book.xlsx", book).read_bytes()
    book.chmod(0o666)
    (folder / "out").chmod(0o555)
    sentence(run("recalc", book, "--in-place", folder=folder, before=common), "cannot be written")
    assert book.read_bytes() == before


@pytest.mark.parametrize("name", READERS)
def test_an_input_that_may_not_be_read(folder: Path, name: str) -> None:
    book = folder / "items.xlsx"
    book.chmod(0)
    done = run(*READERS[name](book, folder / "out"), folder=folder, before=common)
    sentence(done, "items.xlsx", "permission")


@pytest.mark.parametrize("name", ["recalc", "survey"])
def test_an_input_in_a_closed_folder(folder: Path, name: str) -> None:
    closed = folder / "closed"
    closed.mkdir()
    shutil.copyfile(folder / "items.xlsx", closed / "items.xlsx")
    closed.chmod(0)
    try:
        done = run(*READERS[name](closed / "items.xlsx", folder / "out"), folder=folder, before=common)
        sentence(done, "permission")
    finally:
        closed.chmod(0o755)


def test_a_closed_file_among_others_stops_no_other(folder: Path) -> None:
    books = folder / "books"
    books.mkdir()
    for name in ("a.xlsx", "b.xlsx", "c.xlsx"):
        shutil.copyfile(folder / "book.xlsx", books / name).chmod(0o644)
    (books / "b.xlsx").chmod(0)
    books.chmod(0o755)
    done = run("recalc", books, "-o", folder / "out", folder=folder, before=common)
    assert done.returncode == 1
    assert "Traceback" not in done.stderr
    assert left(folder / "out") == ["a.xlsx", "c.xlsx"]
    assert "permission" in done.stdout + done.stderr


# --- files that are none, or no longer there --------------------------------------------------------------------


def _at_once(words: Sequence[object], capsys: pytest.CaptureFixture[str]) -> subprocess.CompletedProcess[str]:
    """Run the command in this process; StuckError where it hangs."""
    with unstuck(30):
        code = main(list(map(str, words)))
    out, err = capsys.readouterr()
    return subprocess.CompletedProcess(list(map(str, words)), code, out, err)


@pytest.mark.parametrize("name", READERS)
@pytest.mark.parametrize("kind", ["nothing", "folder", "pipe", "socket", "device", "dangling", "loop"])
def test_what_is_no_file(
    folder: Path, name: str, kind: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """None of them hangs: a pipe that nobody writes to would wait for ever."""
    path = folder / "odd.xlsx"
    holder = None
    if kind == "folder":
        path = folder / "odd.csv"  # a folder named .xlsx may be one of workbooks
        path.mkdir()
    elif kind == "pipe":
        os.mkfifo(path)
    elif kind == "socket":
        holder = socket.socket(socket.AF_UNIX)
        monkeypatch.chdir(folder)  # such a name must be short
        holder.bind("odd.xlsx")
    elif kind == "device":
        path.symlink_to("/dev/zero")
    elif kind == "dangling":
        path.symlink_to(folder / "gone.xlsx")
    elif kind == "loop":
        path.symlink_to(path)
    sentence(_at_once(READERS[name](path, folder / "out"), capsys), path.name.partition(".")[0])
    if holder is not None:
        holder.close()
    assert left(folder / "out") == []


def test_a_book_that_vanishes_between_listing_and_reading(folder: Path) -> None:
    """A link that leads nowhere is listed and cannot be read: the same to the reader as a file that went in between."""
    books = folder / "books"
    books.mkdir()
    shutil.copyfile(folder / "book.xlsx", books / "a.xlsx")
    (books / "b.xlsx").symlink_to(folder / "gone.xlsx")
    done = run("recalc", books / "a.xlsx", books / "b.xlsx", "-o", folder / "out", folder=folder)
    assert done.returncode == 1
    assert "Traceback" not in done.stderr
    assert "must be an existing file" in done.stdout + done.stderr
    assert left(folder / "out") == ["a.xlsx"]


# --- links in the way of an output ------------------------------------------------------------------------------


def test_an_output_that_is_a_link_is_written_where_it_leads(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The link stays a link; what it leads to is replaced as a whole, and a device or pipe behind it is refused."""
    target, link = folder / "out" / "real.xlsx", folder / "out" / "link.xlsx"
    target.write_bytes(b"what was there")
    link.symlink_to(target)
    assert _at_once(["recalc", folder / "book.xlsx", "-o", link], capsys).returncode == 0
    assert link.is_symlink()
    assert target.read_bytes().startswith(b"PK")
    for name, goal in (("null.xlsx", "/dev/null"), ("loop.xlsx", str(folder / "out" / "loop.xlsx"))):
        odd = folder / "out" / name
        odd.symlink_to(goal)
        sentence(_at_once(["recalc", folder / "book.xlsx", "-o", odd], capsys), name)
        assert odd.is_symlink()
    assert Path("/dev/null").is_char_device()


def test_a_link_to_the_input_is_the_input(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    link = folder / "out" / "link.xlsx"
    link.symlink_to(folder / "book.xlsx")
    before = (folder / "book.xlsx").read_bytes()
    sentence(_at_once(["recalc", folder / "book.xlsx", "-o", link], capsys), "another file than the input")
    link.unlink()
    link.symlink_to(folder / "items.xlsx")
    items = (folder / "items.xlsx").read_bytes()
    for option, path in (("-o", link), ("-o", folder / "items.xlsx")):
        said = _at_once(["survey", folder / "items.xlsx", option, path, "--overwrite"], capsys)
        sentence(said, "must not be the list itself")
    assert (folder / "book.xlsx").read_bytes() == before
    assert (folder / "items.xlsx").read_bytes() == items


# --- names ------------------------------------------------------------------------------------------------------

ODD = ["ü ß 海 \U0001f6a2.xlsx", "new\nline.xlsx", " -o.xlsx", "=a'b\"c$(x)`y`#[1]!%25&amp;.xlsx"]


@pytest.mark.parametrize("name", ODD)
def test_odd_names(folder: Path, name: str, capsys: pytest.CaptureFixture[str]) -> None:
    book, items = folder / name, folder / "out" / name
    shutil.copyfile(folder / "book.xlsx", book)
    shutil.copyfile(folder / "items.xlsx", items)
    assert _at_once(["recalc", book, "-o", folder / "out" / f"new{name}"], capsys).returncode == 0
    assert (folder / "out" / f"new{name}").read_bytes().startswith(b"PK")
    for words in (["survey", items, "--show"], ["compare", items, items]):
        done = _at_once(words, capsys)
        assert done.returncode in (0, 1)
        assert "Traceback" not in done.stderr


@pytest.mark.skipif(sys.platform == "darwin", reason="names must be UTF-8 there")
def test_a_name_that_is_no_text(folder: Path) -> None:
    name = os.fsdecode(b"pump\xff\xfe.xlsx")
    book, out = folder / name, folder / "out" / name
    shutil.copyfile(folder / "book.xlsx", book)
    shutil.copyfile(folder / "items.xlsx", folder / "out" / f"i{name}")
    for words in (
        ["recalc", book, "-o", out], ["recalc", book, "-o", out, "--json"],
        ["survey", folder / "out" / f"i{name}", "--draws", "0", "-o", folder / "out" / "s.xlsx", "--html",
         folder / "out" / "s.html", "--overwrite"],
        ["survey", folder / "out" / f"i{name}", "--draws", "0", "--json"],
        ["compare", folder / "out" / f"i{name}", folder / "out" / f"i{name}"],
        ["explain", folder / "out" / f"i{name}", "21-FCV-110"],
    ):  # fmt: skip
        done = run(*words, folder=folder)
        assert done.returncode in (0, 1), (words, done.stderr)
        assert "Traceback" not in done.stderr
    assert out.read_bytes().startswith(b"PK")
    sentence(run("recalc", folder / os.fsdecode(b"gone\xff.xlsx"), folder=folder), "must be an existing file")


@pytest.mark.parametrize("name", ["n" * 251 + ".xlsx", "n" * 5000 + ".xlsx"])
def test_names_that_are_too_long(folder: Path, name: str, capsys: pytest.CaptureFixture[str]) -> None:
    sentence(_at_once(["recalc", folder / "book.xlsx", "-o", folder / name], capsys))
    sentence(_at_once(["recalc", folder / name], capsys))
    for words in (
        ["survey", folder / "items.xlsx", "-o", folder / name], ["starter", "list", "-o", folder / name],
        ["survey", folder / name], ["compare", folder / name, folder / name],
        ["survey", folder / "items.csv", "--html", folder / name.replace("xlsx", "html")],
    ):  # fmt: skip
        sentence(_at_once(words, capsys))
    assert left(folder) == ["book.xlsx", "items.csv", "items.xlsx", "out"]


def test_a_long_name_that_just_fits(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """255 bytes are a name; the temporary one beside it is shorter."""
    name = "n" * 250 + ".xlsx"
    assert _at_once(["starter", "list", "-o", folder / name], capsys).returncode == 0
    assert _at_once(["recalc", folder / "book.xlsx", "-o", folder / "out" / name], capsys).returncode == 0
