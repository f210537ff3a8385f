"""Takes the pictures of the README in a real LibreOffice Calc under a virtual display.

    python addin/pictures/make.py        in an environment with Lowpoint

Needs (Debian): libreoffice-calc libreoffice-gtk3 python3-uno xvfb openbox xdotool imagemagick pngquant. The office runs
on a private profile with the add-in installed, and on a copy of the sample book. Look at the pictures afterwards.
"""

from __future__ import annotations

import contextlib
import os
import re
import shutil
import subprocess
import sys
import tempfile
import time
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

HERE = Path(__file__).resolve().parent
BOOK = HERE.parents[1] / "workbooks" / "kestrel-bay.xlsx"
SIZE = "1240x740"
HEADINGS = 5
"""The row of the headings on the sheet List."""
LARGEST = 120_000
"""Bytes of a picture, at most."""
NEEDED = ("Xvfb", "openbox", "xdotool", "import", "pngquant", "soffice")
SETTINGS = (
    ("/org.openoffice.Office.Common/Misc", {"ShowTipOfTheDay": False, "FirstRun": False, "ShowDonation": False}),
    ("/org.openoffice.Office.Calc/Formula/Load", {"OOXMLRecalcMode": 0}),
    ("/org.openoffice.Office.Calc/Formula/Syntax", {"SeparatorArg": ",", "SeparatorArrayCol": ";"}),
)


def main() -> None:
    """Install, then take the pictures with the Python that can talk to the office."""
    missing = [name for name in NEEDED if shutil.which(name) is None]
    if missing:
        sys.exit(f"missing: {', '.join(missing)}")
    with tempfile.TemporaryDirectory(prefix="lowpoint-pictures-") as folder:
        work = Path(folder)
        copy_without_filters(BOOK, work / BOOK.name)
        install = [sys.executable, "-m", "lowpoint", "calc", "install", "--profile", str(work / "profile")]
        subprocess.run(install, check=True)
        clean = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
        subprocess.run(["/usr/bin/python3", __file__, "--in", folder], check=True, env=clean)


def copy_without_filters(source: Path, target: Path) -> None:
    """The book without the buttons of its filters: in Calc they take the room of the headings' words."""
    with zipfile.ZipFile(source) as old, zipfile.ZipFile(target, "w", zipfile.ZIP_DEFLATED) as new:
        for name in old.namelist():
            data = old.read(name)
            if name.startswith("xl/worksheets/sheet"):
                data = re.sub(rb"<autoFilter[^>]*(/>|>.*?</autoFilter>)", b"", data)
            elif name == "xl/workbook.xml":
                data = re.sub(rb"<definedName [^>]*_FilterDatabase[^>]*>[^<]*</definedName>", b"", data)
            new.writestr(name, data)


# --- from here on in a Python that has `uno` ----------------------------------------------------------------------
@contextlib.contextmanager
def running(*command: str, **more: Any) -> Iterator[subprocess.Popen[bytes]]:
    """A program that is ended with the block."""
    process = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, **more)
    try:
        yield process
    finally:
        process.terminate()
        try:
            process.wait(20)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()


def take(work: Path) -> None:
    """Start a display, a window manager and the office, and take each picture."""
    display = f":{90 + os.getpid() % 400}"
    os.environ.update(DISPLAY=display, LC_ALL="C.UTF-8", SAL_USE_VCLPLUGIN="gtk3", HOME=str(work), NO_AT_BRIDGE="1")
    profile = (work / "profile").as_uri()
    pipe = f"pictures{os.getpid()}"
    with running("Xvfb", display, "-screen", "0", f"{SIZE}x24", "-nolisten", "tcp"):
        time.sleep(2)
        office = ("soffice", f"-env:UserInstallation={profile}", "--norestore", "--nologo", "--nodefault",
                  f"--accept=pipe,name={pipe};urp;")  # fmt: skip
        with running("openbox"), running(*office) as process:
            context = connected(pipe, process)
            settle(context)
            book = Book(context, work / BOOK.name)
            the_list(book)
            the_wizard(book)
            book.end()


def connected(pipe: str, process: Any) -> Any:
    import uno

    local = uno.getComponentContext()
    resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
    for _ in range(300):
        try:
            return resolver.resolve(f"uno:pipe,name={pipe};urp;StarOffice.ComponentContext")
        except Exception:
            if process.poll() is not None:
                raise
            time.sleep(0.2)
    raise TimeoutError("the office does not answer")


def settle(context: Any) -> None:
    """No tips and no banners; books are recalculated when they are opened."""
    from com.sun.star.beans import PropertyValue

    provider = context.ServiceManager.createInstanceWithContext(
        "com.sun.star.configuration.ConfigurationProvider", context
    )
    for path, values in SETTINGS:
        update = provider.createInstanceWithArguments(
            "com.sun.star.configuration.ConfigurationUpdateAccess", (PropertyValue("nodepath", 0, path, 0),)
        )
        for name, value in values.items():
            with contextlib.suppress(Exception):  # not every office has every setting
                setattr(update, name, value)
        update.commitChanges()


class Book:
    """The book in a window."""

    def __init__(self, context: Any, path: Path) -> None:
        manager = context.ServiceManager
        self.desktop = manager.createInstanceWithContext("com.sun.star.frame.Desktop", context)
        self.dispatcher = manager.createInstanceWithContext("com.sun.star.frame.DispatchHelper", context)
        self.book = self.desktop.loadComponentFromURL(path.as_uri(), "_blank", 0, ())
        self.view = self.book.CurrentController
        self.book.calculateAll()
        time.sleep(3)
        keys("search", "--sync", "--onlyvisible", "--name", BOOK.name, "windowactivate", "--sync", "windowsize",
             *SIZE.split("x"), "windowmove", "0", "0")  # fmt: skip
        self.do("Sidebar")
        time.sleep(2)

    def do(self, command: str) -> None:
        self.dispatcher.executeDispatch(self.view.Frame, f".uno:{command}", "", 0, ())

    def show(self, title: str, heading: str, cell_under: str, row: int, zoom: int) -> None:
        """A sheet scrolled to the column of this heading, with the cursor in a row of the column of another one."""
        sheet = self.book.Sheets.getByName(title)
        self.view.setActiveSheet(sheet)
        self.view.ZoomType, self.view.ZoomValue = 3, zoom  # by value
        right_below = self.view.getByIndex(self.view.Count - 1)
        right_below.FirstVisibleRow, right_below.FirstVisibleColumn = HEADINGS, column(sheet, heading)
        self.view.select(sheet.getCellByPosition(column(sheet, cell_under), row - 1))
        right_below.FirstVisibleColumn = column(sheet, heading)
        time.sleep(2)

    def end(self) -> None:
        self.book.setModified(False)
        self.book.close(True)
        with contextlib.suppress(Exception):
            self.desktop.terminate()


def column(sheet: Any, heading: str) -> int:
    """Where the heading stands that begins with these words."""
    found = [at for at in range(100) if sheet.getCellByPosition(at, HEADINGS - 1).String.startswith(heading)]
    if not found:
        raise LookupError(f"no heading {heading} in the sheet {sheet.Name}")
    return found[0]


def keys(*words: str) -> None:
    subprocess.run(["xdotool", *words], check=True)


def photograph(name: str) -> None:
    """The whole display as a PNG with a palette, small enough for a README."""
    raw, out = Path(tempfile.gettempdir(), f"{os.getpid()}-{name}"), HERE / name
    subprocess.run(["import", "-window", "root", str(raw)], check=True)
    try:
        for colours in ("128", "64", "32"):
            subprocess.run(["pngquant", "--force", "--nofs", "--speed", "1", "--strip", "--output", str(out), colours,
                            str(raw)], check=True)  # fmt: skip
            if out.stat().st_size <= LARGEST:
                return
        sys.exit(f"{name} has {out.stat().st_size} bytes")
    finally:
        raw.unlink()


def the_list(book: Book) -> None:
    """The verdicts beside what they rest on."""
    book.show("List", "Inlet pressure p1", "Index sigma", 21, 80)
    photograph("calc-list.png")


def the_wizard(book: Book) -> None:
    """The function wizard on the required coefficient of a row."""
    book.show("List", "Inlet pressure p1", "Required coefficient", 21, 80)
    book.do("FunctionDialog")
    time.sleep(4)
    photograph("calc-wizard.png")
    keys("key", "Escape")
    time.sleep(1)


if __name__ == "__main__":
    if sys.argv[1:2] == ["--in"]:
        take(Path(sys.argv[2]))
    else:
        main()
