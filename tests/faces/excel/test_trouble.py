"""What goes wrong between Excel and Python: a true error in the cell, the reason through LP_WHY, nothing remembered."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from lowpoint import __version__
from lowpoint.problems import CellError

SIGMA = ("LP_SIGMA", 10.0, 5.0, 1.0)
NewExcel = Callable[[], Any]


@pytest.fixture(autouse=True)
def quiet_log(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Path:
    """The log of failures in a folder of the test."""
    from lowpoint.faces.calc_addin.inside.journal import Journal
    from lowpoint.faces.excel_addin import serving

    log = tmp_path / "excel.log"
    monkeypatch.setattr(serving, "_journal", Journal(log))
    return log


def test_library_absent(new_excel: NewExcel) -> None:
    excel = new_excel()
    excel.library.folder = "C:\\elsewhere\\"
    assert excel.run(*SIGMA) is CellError.VALUE
    why = excel.run("LP_WHY", *SIGMA)
    assert "xlwings64-0.37.8.dll of xlwings is not beside C:\\env\\Scripts\\python.exe" in why
    assert "lowpoint excel install" in why
    assert not excel.library.commands, "Python was started all the same"


def test_a_failed_start_is_not_tried_again_at_once(new_excel: NewExcel) -> None:
    """A start that fails can take a minute; a list of cells must not pay it once a cell."""
    excel = new_excel()
    excel.library.folder = "C:\\elsewhere\\"
    assert [excel.run(*SIGMA) for _ in range(5)] == [CellError.VALUE] * 5
    assert len(excel.library.loaded) == 2, "the two folders of one try"


def test_python_is_looked_for_in_both_folders_and_started_once(new_excel: NewExcel) -> None:
    excel = new_excel()
    assert [excel.run(*SIGMA) for _ in range(3)] == [1.8] * 3  # (10-1)/(10-5), by hand
    assert excel.library.loaded == ["C:\\env\\Scripts\\xlwings64-0.37.8.dll", "C:\\env\\xlwings64-0.37.8.dll"]
    assert len(excel.library.commands) == 1


def test_a_server_that_died_is_started_again_within_the_call(new_excel: NewExcel) -> None:
    excel = new_excel()
    assert excel.run(*SIGMA) == 1.8
    excel.library.dead = 1
    assert excel.run(*SIGMA) == 1.8
    assert len(excel.library.commands) == 2


def test_a_server_that_dies_again_and_again_is_an_error(new_excel: NewExcel) -> None:
    excel = new_excel()
    excel.library.dead = 2
    assert excel.run(*SIGMA) is CellError.VALUE
    excel.library.dead = 2
    assert "remote server" in excel.run("LP_WHY", *SIGMA)
    assert excel.run(*SIGMA) == 1.8, "nothing of the failure is left"
    assert excel.run("LP_WHY", *SIGMA) == "ok"


def test_an_add_in_of_another_version_computes_nothing(new_excel: NewExcel, monkeypatch: pytest.MonkeyPatch) -> None:
    from lowpoint.faces.excel_addin import serving

    excel = new_excel()
    assert excel.run(*SIGMA) == 1.8
    for maker, told in (("9.9.9 abc", "the package is 9.9.9"), (f"{__version__} abc", f"the package is {__version__}")):
        monkeypatch.setattr(serving, "maker", lambda maker=maker: maker)
        monkeypatch.setattr(serving, "__version__", maker.partition(" ")[0])
        respond, why = serving.responder("LP_SIGMA"), serving.responder("LP_WHY")
        ours = excel.run_macro("LpMaker")
        assert respond(ours, *SIGMA[1:]) == [["\x012015"]]
        [[sentence]] = why(ours, *SIGMA)
        assert sentence.startswith(f"The add-in was made by Lowpoint {__version__}, but")
        assert told.replace(f"is {__version__}", f"is another {__version__}") in sentence
        assert "lowpoint excel install" in sentence


def test_another_version_is_seen_by_the_cells(new_excel: NewExcel) -> None:
    """The add-in's own VBA says what made it; here it says something else."""
    excel = new_excel()
    text = excel.modules["LowpointLink"].replace(f'"{__version__} ', '"0.0.9 ')
    assert text != excel.modules["LowpointLink"]
    excel.replace("LowpointLink", text)
    assert excel.run(*SIGMA) is CellError.VALUE
    assert "made by Lowpoint 0.0.9" in excel.run("LP_WHY", *SIGMA)


def test_a_crash_is_an_error_in_the_cell_and_a_line_in_the_log(
    new_excel: NewExcel, monkeypatch: pytest.MonkeyPatch, quiet_log: Path
) -> None:
    from lowpoint.faces.excel_addin import serving

    excel = new_excel()
    assert excel.run(*SIGMA) == 1.8

    def crash(name: str, arguments: Any) -> Any:
        raise ZeroDivisionError("oops")

    monkeypatch.setattr(serving.cells, "call", crash)
    assert excel.run(*SIGMA) is CellError.VALUE
    assert "our bug (LP_WHY: ZeroDivisionError: oops)" in excel.run("LP_WHY", *SIGMA)
    assert "LP_SIGMA: ZeroDivisionError: oops" in quiet_log.read_text(encoding="utf-8")
    monkeypatch.undo()
    assert excel.run(*SIGMA) == 1.8


def test_an_exception_on_the_way_tells_its_last_line(new_excel: NewExcel, monkeypatch: pytest.MonkeyPatch) -> None:
    """What pywin32 makes of an exception is a whole traceback."""
    import xlwings.com_server

    def broken(*_: Any) -> Any:
        raise KeyError("nowhere")

    monkeypatch.setattr(xlwings.com_server, "call_udf", broken)
    excel = new_excel()
    assert excel.run(*SIGMA) is CellError.VALUE
    assert "cannot ask Python: KeyError: 'nowhere'" in excel.run("LP_WHY", *SIGMA)


def test_nothing_but_a_number_a_word_or_an_error_leaves_python() -> None:
    from faces.excel.standins import returned
    from lowpoint.faces.excel_addin.values import sent

    assert returned(sent([[1.0, CellError.NUM], ["word", CellError.NA]])) == [[1.0, "\x012036"], ["word", "\x012042"]]
    with pytest.raises(TypeError):
        returned(object())


def test_errors_that_have_no_word_are_value_errors() -> None:
    """#FIELD! is 2049 (the list xlCVError of Excel); it must not pass for a number."""
    from lowpoint.faces.excel_addin.values import argument

    assert argument(2049 - 2146828288) is CellError.VALUE
    assert argument(2042 - 2146828288) is CellError.NA
    assert argument(((2042 - 2146828288, 1.0),)) == [[CellError.NA, 1.0]]
    assert argument(7) == 7
    assert argument(True) is True
