"""A real office for the tests of the Calc add-in: private profiles, the add-in installed by its own command."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from calc_office import Office, office_python
from lowpoint.errors import LowpointError
from lowpoint.faces import cli
from lowpoint.faces.calc_addin.office import find_office


@pytest.fixture(scope="session")
def office_tools() -> tuple[str, str]:
    """The Python with `uno`, and the office's program."""
    try:
        program = find_office().program
    except LowpointError:
        pytest.skip("LibreOffice (soffice) is not installed on this machine")
    python = office_python(program)
    if python is None:
        pytest.skip("no Python on this machine has `uno` (on Debian: python3-uno)")
    return python, str(program / "soffice")


Starter = Callable[[Path], Office]


@pytest.fixture(scope="session")
def start_office(office_tools: tuple[str, str]) -> Iterator[Starter]:
    """Starts an office on a profile; whatever is still open at the end is closed."""
    started: list[Office] = []

    def start(profile: Path) -> Office:
        profile.mkdir(parents=True, exist_ok=True)
        office = Office(*office_tools, profile)
        started.append(office)
        return office

    yield start
    for office in started:
        office.end()


def install(profile: Path, *words: str) -> None:
    assert cli.main(["calc", "install", "--profile", str(profile), *words]) == 0


@pytest.fixture(scope="session")
def office(start_office: Starter, tmp_path_factory: pytest.TempPathFactory) -> Office:
    """The office that most tests share, with the add-in installed."""
    profile = tmp_path_factory.mktemp("office") / "profile"
    install(profile)
    return start_office(profile)


@pytest.fixture
def helper_office(start_office: Starter, tmp_path: Path) -> Iterator[Office]:
    """An office of its own that computes in a helper process."""
    install(tmp_path / "profile", "--helper")
    office = start_office(tmp_path / "profile")
    yield office
    office.end()


@pytest.fixture(scope="session")
def in_the_office(office: Office) -> None:
    """Skips what measures the way in the office itself where the versions of Python differ."""
    if find_office().python != sys.version_info[:2]:
        pytest.skip("the office's Python is of another version than this one: it computes in a helper process")
