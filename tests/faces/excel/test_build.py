"""The add-in as a file: the same bytes each time, within the limits of VBA, and in step with xlwings' own generator."""

from __future__ import annotations

import re
import tomllib
import zipfile
from pathlib import Path
from typing import Any

import pytest

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.faces import cli
from lowpoint.faces.excel_addin import building, vba, wants
from lowpoint.faces.excel_addin.core import link
from lowpoint.faces.excel_addin.outline import MODULE, outlines
from lowpoint.faces.excel_addin.serving import category
from lowpoint.registry import functions

ROOT = Path(__file__).resolve().parents[3]
SOURCES = ROOT / "addin" / "excel"
FUNCTION = re.compile(r"^Public Function (L\w+)\((.*)\)(?: As Variant)?$", re.MULTILINE)


@pytest.fixture(scope="module")
def modules(addin: Path) -> dict[str, str]:
    from faces.excel.office import modules_of

    return modules_of(addin)


def joined(text: str) -> str:
    """Continued lines in one."""
    return re.sub(r" _\n\s*", " ", text)


def worksheet_functions(modules: dict[str, str]) -> dict[str, list[str]]:
    """Every public function that a cell can call, with its arguments."""
    found = {}
    for text in modules.values():
        if "Option Private Module" not in text:
            found.update({name: arguments.split(", ") for name, arguments in FUNCTION.findall(joined(text))})
    return found


def test_building_twice_gives_the_same_bytes(addin: Path, tmp_path: Path) -> None:
    again = tmp_path / "again.xlam"
    assert cli.main(["excel", "build", str(again), "--python", "C:\\env\\Scripts\\python.exe", "--json"]) == 0
    assert again.read_bytes() == addin.read_bytes()
    with zipfile.ZipFile(addin) as archive:
        assert archive.testzip() is None
        assert {member.date_time for member in archive.infolist()} == {(1980, 1, 1, 0, 0, 0)}
        assert "xl/vbaProject.bin" in archive.namelist()


def test_pyopenvba_finds_the_file_sound(addin: Path) -> None:
    import pyopenvba

    report = pyopenvba.check_file(addin)
    assert report.complete
    assert not report.issues


def test_the_file_says_what_made_it(addin: Path) -> None:
    import xlwings

    told = building.made_with(addin.read_bytes())
    assert told is not None
    assert told.startswith(__version__ + " ")
    assert told.endswith(f" xlwings {xlwings.__version__}")
    assert building.made_with(b"no archive") is None


def test_the_committed_sources_are_not_stale(tmp_path: Path) -> None:
    """After a change: lowpoint excel sources addin/excel."""
    written = vba.write_sources(tmp_path)
    assert {path.name for path in written} == {path.name for path in SOURCES.iterdir()}
    for path in written:
        assert path.read_bytes() == (SOURCES / path.name).read_bytes(), f"{path.name} is stale"


def test_the_embedded_modules_are_the_sources(modules: dict[str, str]) -> None:
    for path in SOURCES.iterdir():
        committed = path.read_text(encoding="ascii")
        embedded = modules[path.stem]
        if path.stem == "LowpointLink":
            committed = committed.replace("C:\\path\\to\\python.exe", "C:\\env\\Scripts\\python.exe")
        assert embedded.rstrip("\n").endswith(committed.rstrip("\n")), path.name


def test_nothing_of_the_templates_own_vba_is_left(modules: dict[str, str]) -> None:
    """A cell of any book could call the public functions of the template: run Python, write a file."""
    from faces.excel.office import modules_of

    assert set(modules) == {path.stem for path in SOURCES.iterdir()} | {"Sheet2"}
    everything = "\n".join(modules.values())
    import xlwings

    dangerous = ("RunPython", "SaveConfigToFile", "ReadFile", "GetConfig")
    template = "\n".join(modules_of(Path(xlwings.__file__).parent / "quickstart_addin.xlam").values())
    for word in dangerous:
        assert word in template, "the check has nothing to look for"
        assert word not in everything
    assert set(worksheet_functions(modules)) == set(functions)


def test_every_function_with_its_arguments(modules: dict[str, str]) -> None:
    found = worksheet_functions(modules)
    for name, function in functions.items():
        arguments = [one.removeprefix("Optional ") for one in found[name]]
        if function.variadic:
            assert arguments == ["function_", "ParamArray arguments() As Variant"]
            continue
        assert [argument.rstrip("_") for argument in arguments] == [p.name for p in function.parameters], name
        assert all(one.startswith("Optional ") for one in found[name])


def test_limits_of_vba_and_of_the_wizard(modules: dict[str, str]) -> None:
    """Lines of 1023 characters, 24 continuations, 60 arguments, descriptions of 255 (their documentation)."""
    for name, text in modules.items():
        assert len(name) <= 31
        assert max(map(len, text.split("\n"))) <= 1023
        assert not re.search(r"(?:.* _\n){25}", text)
        assert text.isascii()
    for name, arguments in worksheet_functions(modules).items():
        names = [one.split()[-1].lower() for one in arguments]
        assert len(names) <= 60
        assert len(set(names)) == len(names)
        assert not re.fullmatch(r"(?i)[a-z]{1,3}\d+|r\d*c\d*", name), "a cell is called so"
    for outline in outlines():
        assert len(outline.text) <= 255
        assert len(outline.arguments) <= 60
        assert all(0 < len(argument.text) <= 255 for argument in outline.arguments)


def test_words_of_vba_and_python_are_no_arguments() -> None:
    names = {argument.name for outline in outlines() for argument in outline.arguments}
    assert {"from_", "to_", "property_", "function_"} <= names
    assert not names & {"from", "to", "property", "function"}


# --- in step with xlwings -----------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def generated(addin: Path) -> tuple[str, list[tuple[str, dict[str, Any]]]]:
    from faces.excel.standins import generated_vba

    return generated_vba(MODULE)


def test_the_generator_of_xlwings_makes_the_same_calls(modules: dict[str, str], generated: Any) -> None:
    """Arguments and their order, and what is sent to Python: a hidden first one, then all of them."""
    text = generated[0]
    theirs = {name: arguments.split(", ") for name, arguments in re.findall(r"^Function (\w+)\((.*)\)$", text, re.M)}
    ours = worksheet_functions(modules)
    assert set(theirs) == set(ours)
    for name, arguments in ours.items():
        assert [one.removesuffix(" As Variant") for one in arguments] == theirs[name]
    calls = dict(re.findall(rf'= XLPy\.CallUDF\("{re.escape(MODULE)}", "(\w+)", Array\((.*?)\), ActiveWorkbook', text))
    assert set(calls) == set(functions) - {"LP_WHY"}
    everything = joined("\n".join(modules.values()))
    for name, sent in calls.items():
        first, *rest = sent.split(", ")
        assert first == "LpMaker"
        assert f"    {name} = LpCell({', '.join([chr(34) + name + chr(34), *rest])})\n" in everything


def test_the_wizard_texts_are_those_of_the_decorators(modules: dict[str, str], generated: Any, excel: Any) -> None:
    """What xlwings would set, our VBA sets when the add-in opens."""
    theirs = {macro.rpartition("!")[2]: options for macro, options in generated[1]}
    ours = excel.described()
    assert set(ours) == set(theirs) == set(functions)
    for name, (about, listed, help_) in ours.items():
        assert about == theirs[name]["Description"]
        assert listed == theirs[name]["Category"]
        assert help_ == theirs[name]["ArgumentDescriptions"]
    assert {category(outline) for outline in outlines()} == {listed for _, listed, _ in ours.values()}
    assert "LpDescribe" in modules["ThisWorkbook"]


def test_the_link_speaks_to_the_library_as_xlwings_does() -> None:
    """The declaration of the library's function, its file and the command that starts the server."""
    import xlwings

    from faces.excel.office import modules_of

    template = modules_of(Path(xlwings.__file__).parent / "quickstart_addin.xlam")["xlwings"]
    ours = joined(link("C:\\python.exe", xlwings.__version__, "0 x"))
    for library in re.findall(r'Lib "(xlwings\d\d-.*?\.dll)"', ours):
        assert (
            f'XLPyDLLActivateAuto Lib "{library}" (ByRef Result As Variant, Optional ByVal Config As String = ""'
            in template
        )
        assert "Optional ByVal mode As Long = 1) As Long" in template
    assert len(re.findall(r'Alias "XLPyDLLActivateAuto"', ours)) == 2
    assert "import xlwings; xlwings.serve('$(CLSID)')" in template
    assert "import xlwings; xlwings.serve('$(CLSID)')" in ours
    assert "XLPyDLLActivateAuto(XLPy, XLPyCommand, 1) Then Err.Raise" in template


# --- what is asked for --------------------------------------------------------------------------------------------


def test_versions_are_those_of_the_extra() -> None:
    """pyproject.toml asks for what the code asks for."""
    extras = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]["optional-dependencies"]
    asked = {re.split(r"[<>=]", line)[0]: line for line in extras["excel"]}
    for name, (low, high) in wants.WANTED.items():
        assert asked[name] == f"{name}>={'.'.join(map(str, low))},<{'.'.join(map(str, high))}"
    assert any("excel" in line for line in extras["all"])
    assert any("excel" in line for line in extras["test"])


def test_the_tests_run_with_the_version_that_the_code_names() -> None:
    import xlwings

    assert wants.need()["xlwings"] == xlwings.__version__
    assert wants.installed("no-such-distribution-of-anyone") is None


@pytest.mark.parametrize(
    "versions, told",
    [
        ({}, "xlwings: must be installed, got no such package."),
        ({"xlwings": "0.30.1"}, "xlwings: must be of version 0.37.8 or later and before 0.38, got 0.30.1."),
        ({"xlwings": "0.38.0"}, "xlwings: must be of version 0.37.8 or later and before 0.38, got 0.38.0."),
        ({"xlwings": "0.37.9"}, "pyOpenVBA: must be installed, got no such package."),
        (
            {"xlwings": "0.37.8", "pyOpenVBA": "6.6"},
            "pyOpenVBA: must be of version 6.5 or later and before 6.6, got 6.6.",
        ),
    ],
)
def test_what_is_missing_or_another_is_one_sentence(versions: dict[str, str], told: str) -> None:
    with pytest.raises(LowpointError) as refused:
        building.build("python.exe", versions.get)
    assert str(refused.value).startswith(told)
    assert "pip install 'lowpoint[excel]'" in str(refused.value)


def test_build_refuses_another_ending_and_writes_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["excel", "build", str(tmp_path / "lowpoint.xlsm")]) == 2
    assert "must be an add-in (.xlam)" in capsys.readouterr().err
    assert cli.main(["excel", "build", str(tmp_path / "no" / "lowpoint.xlam")]) == 2
    assert "its folder does not exist" in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []


def test_a_path_outside_ascii_is_written_by_numbers() -> None:
    text = link('C:\\Users\\Zoë "x"\\python.exe', "0.37.8", "0 x")
    assert 'LpPython = "C:\\Users\\Zo" & ChrW$(235) & " ""x""\\python.exe"' in text
    assert text.isascii()
