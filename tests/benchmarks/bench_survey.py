"""The survey of a long list, against openpyxl's bare reading of that list and writing of that output, and its draws.

Each way runs in a process of its own, imports included; loading the property library counts for the whole, not for the
calculation. Seconds are those of the processor, of which both ways keep one busy: other work on the machine would
disturb runs as long as these. The bare way writes the cells of the survey's own workbook,
plain values in openpyxl's write-only mode, its fastest; what it writes is fetched before the clock starts.
"""

from __future__ import annotations

import json
import random
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from figures import Figure

TESTS = Path(__file__).parents[1]
sys.path.insert(0, str(TESTS))
from survey_lists import kestrel_rows, write_xlsx  # noqa: E402

CASES = 3
DRAWS = 200

_START = """
import json, sys, time
from pathlib import Path
more, words = {}, sys.argv[1:]
"""
_BARE = """
import openpyxl
kept = openpyxl.load_workbook(words[1], read_only=True)
sheets = [(sheet.title, list(sheet.iter_rows(values_only=True))) for sheet in kept]
start = time.process_time()
listed = openpyxl.load_workbook(words[0], read_only=True, data_only=True)
rows = [row for sheet in listed for row in sheet.iter_rows(values_only=True)]
more['read'] = time.process_time() - start
book = openpyxl.Workbook(write_only=True)
for title, rows in sheets:
    sheet = book.create_sheet(title)
    for row in rows:
        sheet.append(row)
book.save(words[2])
more['seconds'] = time.process_time() - start
"""
_SURVEY = """
start = time.process_time()
from lowpoint.survey.book import write_book
from lowpoint.survey.reading import read_list
from lowpoint.survey.surveying import Wishes, furthered, surveyed
read = read_list(words[0])
import CoolProp.CoolProp
loaded = time.process_time()
survey = surveyed(*read)
judged = time.process_time()
more['judged'] = judged - loaded
if 'everything' in words:
    survey = furthered(survey, Wishes())
more['furthered'] = time.process_time() - judged
write_book(survey, words[1], pages=0)
more['seconds'] = time.process_time() - start
more['failing'] = sum(item.fails for item in survey.items)
"""
_DRAWS = """
from lowpoint.survey import survey_list
from lowpoint.survey.sensing import sense
survey = survey_list(words[0])
start = time.process_time()
found = sense(survey.cases, survey.findings, draws=int(words[1]), every=True)
more['seconds'] = (time.process_time() - start) / survey.cases.count * 10_000
more['drawn'] = int((found.stays == found.stays).sum())
"""
_END = "\nprint(json.dumps(more))"


def write_list(path: Path, items: int) -> None:
    """Items of Kestrel Bay with other flows, pressures and temperatures, three cases each."""
    chance = random.Random(11)
    headings, rows = kestrel_rows()
    flow, t, p1, p2 = (
        headings.index(name) for name in ("Flow, m3/h", "Temperature [deg C]", "p1 [bar g]", "p2 [bar g]")
    )
    groups = [rows[i : i + CASES] for i in range(0, len(rows), CASES)]
    sound = [group for group in groups if all(_is_sound(row, (flow, t, p1, p2)) for row in group)]
    made: list[list[Any]] = []
    for item in range(items):
        wide = chance.uniform(0.9, 1.1)
        for row in sound[item % len(sound)]:
            other = list(row)
            other[0] = f"{item:05}-FCV"
            other[flow] = round(row[flow] * wide, 1)
            other[t] = round(row[t] + chance.uniform(-1.0, 1.0), 1)
            other[p1] = round(row[p1] * chance.uniform(1.0, 1.05), 2)
            made.append(other)
    write_xlsx(path, headings, made)


def _is_sound(row: list[Any], places: tuple[int, ...]) -> bool:
    """No planted mistake: numbers in order."""
    numbers = [row[place] for place in places]
    return all(isinstance(x, int | float) for x in numbers) and 0.0 < numbers[3] < numbers[2]


def _measured(code: str, *words: str) -> dict[str, float]:
    run = [sys.executable, "-c", _START + code + _END, *words]
    done = subprocess.run(run, check=True, capture_output=True, text=True)
    found: dict[str, float] = json.loads(done.stdout.splitlines()[-1])
    return found


def _best(times: int, code: str, *words: str) -> dict[str, float]:
    return min((_measured(code, *words) for _ in range(times)), key=lambda found: found["seconds"])


def figures(quick: bool) -> Iterator[Figure]:
    items, times = (300, 1) if quick else (10_000, 2)
    with tempfile.TemporaryDirectory() as folder:
        listed, out, bare = (str(Path(folder, name)) for name in ("list.xlsx", "out.xlsx", "bare.xlsx"))
        write_list(Path(listed), items)
        label = f"survey of {items} items with {CASES} cases"
        ours = _best(times, _SURVEY, listed, out)
        theirs = _best(times, _BARE, listed, out, bare)
        yield Figure(f"{label}, no charts: the whole", ours["seconds"], "s")
        yield Figure(f"{label}: openpyxl's bare reading and writing", theirs["seconds"], "s")
        yield Figure(
            f"{label}: the whole against openpyxl's bare", ours["seconds"] / theirs["seconds"], "", at_most=1.5
        )
        yield Figure(f"{label}: share of the calculation", ours["judged"] / ours["seconds"], "", at_most=0.15)
        everything = _measured(_SURVEY, listed, out, "everything")
        cured = f"draws and the remedies of {everything['failing']:.0f} failing items add"
        yield Figure(f"{label}: {cured}", everything["furthered"], "s")
        draws = _best(times, _DRAWS, listed, str(DRAWS))
        yield Figure(f"{DRAWS} draws a case, no case spared, each 10000 cases", draws["seconds"], "s", at_most=5.0)
