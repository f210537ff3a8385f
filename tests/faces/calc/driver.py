"""Drives a real office for the tests: started with a Python that has `uno`, it takes a line of JSON and answers one.

A request is ``[action, arguments]``, a reply ``{"value": ...}`` or ``{"error": ...}``. Books are numbered.
"""

from __future__ import annotations

import contextlib
import json
import os
import subprocess
import sys
import time

import uno
from com.sun.star.beans import PropertyValue

ERRORS = 4  # com.sun.star.sheet.FormulaResult.ERROR
FILTERS = {".xlsx": "Calc MS Excel 2007 XML", ".ods": "calc8"}


def url(path):
    return uno.systemPathToFileUrl(os.path.abspath(path))


def properties(**values):
    return tuple(PropertyValue(name, 0, value, 0) for name, value in values.items())


class Driver:
    def __init__(self):
        self.process = self.desktop = self.context = None
        self.books = {}

    def start(self, soffice, profile):
        pipe = f"lowpoint{os.getpid()}"
        begun = time.monotonic()
        # exec: what is started is the office itself, so that ending it ends all of it.
        self.process = subprocess.Popen(
            [soffice, f"-env:UserInstallation={url(profile)}", "--headless", "--norestore", "--nologo", "--nodefault",
             f"--accept=pipe,name={pipe};urp;"],
            stdin=subprocess.DEVNULL, stdout=sys.stderr,
        )  # fmt: skip
        local = uno.getComponentContext()
        resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
        while True:
            try:
                self.context = resolver.resolve(f"uno:pipe,name={pipe};urp;StarOffice.ComponentContext")
                break
            except Exception:
                if time.monotonic() - begun > 90 or self.process.poll() is not None:
                    raise
                time.sleep(0.1)
        manager = self.context.ServiceManager
        self.desktop = manager.createInstanceWithContext("com.sun.star.frame.Desktop", self.context)
        provider = manager.createInstanceWithContext("com.sun.star.configuration.ConfigurationProvider", self.context)
        update = provider.createInstanceWithArguments(
            "com.sun.star.configuration.ConfigurationUpdateAccess",
            properties(nodepath="/org.openoffice.Office.Calc/Formula/Load"),
        )
        update.OOXMLRecalcMode = update.ODFRecalcMode = 0  # recalculate whatever is opened
        update.commitChanges()
        return time.monotonic() - begun

    def stop(self):
        with contextlib.suppress(Exception):
            self.desktop.terminate()
        try:
            self.process.wait(20)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait()
        return None

    def alive(self):
        return self.process.poll() is None

    def new(self):
        return self._kept(
            self.desktop.loadComponentFromURL("private:factory/scalc", "_blank", 0, properties(Hidden=True))
        )

    def open(self, path):
        """The book's number, and the seconds of processor time that the opening took."""
        begun = self.busy()
        book = self.desktop.loadComponentFromURL(url(path), "_blank", 0, properties(Hidden=True))
        if book is None:
            raise OSError(f"the office does not open {path}")
        return [self._kept(book), self.busy() - begun]

    def _kept(self, book):
        number = len(self.books)
        self.books[number] = book
        return number

    def _range(self, book, place):
        sheets = self.books[book].Sheets
        title, _, cells = place.rpartition("!")
        sheet = sheets.getByName(title) if title else sheets.getByIndex(0)
        return sheet.getCellRangeByName(cells)

    def put(self, book, place, rows):
        """Texts that begin with = are formulas; null leaves a cell blank."""
        cells = self._range(book, place)
        cells.setFormulaArray(tuple(tuple("" if v is None else v for v in row) for row in rows))

    def put_values(self, book, place, rows):
        self._range(book, place).setDataArray(tuple(tuple("" if v is None else v for v in row) for row in rows))

    def array(self, book, place, formula):
        self._range(book, place).setArrayFormula(formula)

    def read(self, book, place):
        """Of each cell the number or text it shows, and its error code (0 for none)."""
        cells = self._range(book, place)
        at = cells.RangeAddress
        data = cells.getDataArray()
        errors = [[0] * len(row) for row in data]
        for part in cells.queryFormulaCells(ERRORS).RangeAddresses:
            for y in range(part.StartRow - at.StartRow, part.EndRow - at.StartRow + 1):
                for x in range(part.StartColumn - at.StartColumn, part.EndColumn - at.StartColumn + 1):
                    errors[y][x] = cells.getCellByPosition(x, y).getError()
        return [[[value, error] for value, error in zip(*both, strict=True)] for both in zip(data, errors, strict=True)]

    def formulas(self, book, place):
        return [list(row) for row in self._range(book, place).getFormulaArray()]

    def local_formula(self, book, place):
        """The formula as the formula bar shows it."""
        return self._range(book, place).getCellByPosition(0, 0).FormulaLocal

    def recalculate(self, book):
        """Seconds of processor time that a hard recalculation took: other work on the machine counts little there."""
        begun = self.busy()
        self.books[book].calculateAll()
        return self.busy() - begun

    def busy(self):
        """Processor time of the office and of all it started, where the system tells it; else time on the clock."""
        if not os.path.isdir("/proc/self"):
            return time.monotonic()
        times = {}
        for name in os.listdir("/proc"):
            if name.isdigit():
                with contextlib.suppress(OSError), open(f"/proc/{name}/stat") as stat:
                    fields = stat.read().rpartition(")")[2].split()
                    times[int(name)] = (int(fields[1]), int(fields[11]) + int(fields[12]))
        return sum(spent for pid, (_, spent) in times.items() if self._started(pid, times)) / os.sysconf("SC_CLK_TCK")

    def _started(self, pid, times):
        while pid in times:
            if pid == self.process.pid:
                return True
            pid = times[pid][0]
        return False

    def modified(self, book):
        return self.books[book].isModified()

    def names(self, book):
        return list(self.books[book].NamedRanges.ElementNames)

    def save(self, book, path=None):
        """Save in place, or as another file (the kind follows the ending)."""
        if path is None:
            self.books[book].store()
        else:
            kind = FILTERS[os.path.splitext(path)[1]]
            self.books[book].storeAsURL(url(path), properties(FilterName=kind, Overwrite=True))

    def copy(self, book, path):
        """A copy, as a conversion on the command line makes it."""
        self.books[book].storeToURL(url(path), properties(FilterName=FILTERS[os.path.splitext(path)[1]]))

    def close(self, book):
        self.books[book].close(True)

    def wizard(self):
        """What the function wizard knows of the add-in's functions, by name."""
        manager = self.context.ServiceManager
        listed = manager.createInstanceWithContext("com.sun.star.sheet.FunctionDescriptions", self.context)
        found = {}
        for index in range(listed.Count):
            told = {value.Name: value.Value for value in listed.getByIndex(index)}
            if told["Name"].startswith(("LP_", "LPU_")):
                arguments = [[a.Name, a.Description, a.IsOptional] for a in told["Arguments"]]
                found[told["Name"]] = [told["Category"], told["Description"], arguments]
        return found


def main():
    driver = Driver()
    for line in sys.stdin:
        action, arguments = json.loads(line)
        try:
            reply = {"value": getattr(driver, action)(*arguments)}
        except Exception as problem:
            reply = {"error": f"{type(problem).__name__}: {problem}"}
        print(json.dumps(reply), flush=True)
        if action == "stop":
            return


if __name__ == "__main__":
    main()
