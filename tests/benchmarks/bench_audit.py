"""The audit of vendors' sheets: a population of files in all layouts, what was found in them, and how fast.

Mistakes are planted by plain arithmetic (``vendor_slips``), never by the core that looks for them; what no number of a
sheet can tell apart is proved by the same arithmetic. Seconds are those of the processor where one process is kept
busy, and of the clock for a cold start.
"""

from __future__ import annotations

import random
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator, Sequence
from itertools import cycle
from pathlib import Path

from figures import Figure, best_of

TESTS = Path(__file__).parents[1]
sys.path.insert(0, str(TESTS))
from vendor_layouts import LAYOUTS  # noqa: E402
from vendor_population import Result, drawn_pairs, label_table, plain, population, suspect_table, twins  # noqa: E402
from vendor_samples import SAMPLES, written  # noqa: E402
from vendor_sheets import made  # noqa: E402
from vendor_slips import SLIPS  # noqa: E402

SEED = 2026
_COLD = """
import sys
from lowpoint.audit.auditing import audit_document
from lowpoint.audit.reading import read_sheet
audit = audit_document(read_sheet(sys.argv[1]))
sys.exit(0 if audit.claims[0] else 3)
"""


def figures(quick: bool) -> Iterator[Figure]:
    each = 1 if quick else 2
    pairs = drawn_pairs(SEED, 10 if quick else 50)
    results = [*population(SEED, 10 * each, [()]), *population(SEED, each, [(name,) for name in SLIPS], rotating=quick),
               *population(SEED, 1, pairs)]  # fmt: skip
    print(label_table(results))
    print(suspect_table(results))
    yield from _evidence(results)
    yield from _speed(quick)


def _evidence(results: Sequence[Result]) -> Iterator[Figure]:
    yield Figure("audit: sheets of the population", len(results), "")
    asked = sum(len(result.sheet.places) for result in results)
    # No goal: it holds for layouts that are new to the reader, which these were only once.
    yield Figure("audit: quantities read in the right cell and case, in layouts used to mend the reader",
                 100.0 * sum(r.right for r in results) / asked, "%")  # fmt: skip
    correct = [result for result in results if not result.sheet.slips]
    yield Figure(f"audit: false findings on {len(correct)} correct sheets", sum(len(r.false) for r in correct), "",
                 at_most=0.0)  # fmt: skip
    for count, what, goal in ((1, "single mistakes", 95.0), (2, "pairs of mistakes", None)):
        some = [result for result in results if len(result.sheet.slips) == count]
        wrong = [result for result in some if result.trial.wrong]
        moving = [result for result in some if plain(result.sheet)]
        found = sum(result.trial.wrong > 0 for result in moving)
        yield Figure(f"audit: {what} that move a number by 2 % or more: found", 100.0 * found / len(moving), "%")
        yield Figure(f"audit: {what} of any size: found", 100.0 * len(wrong) / len(some), "%")
        told = [result for result in wrong if result.trial.first or not result.proved]
        yield Figure(f"audit: {what} that plain arithmetic cannot tell from the one named first",
                     100.0 * (1.0 - len(told) / len(wrong)), "%")  # fmt: skip
        first, three = sum(r.trial.first for r in told), sum(r.trial.in_three for r in wrong)
        yield Figure(f"audit: {what}, all others: right first", 100.0 * first / len(told), "%", at_least=goal)
        yield Figure(f"audit: {what} in the first three, ties included", 100.0 * three / len(wrong), "%")
    print("single mistakes that print the same numbers, by plain arithmetic (share of correct sheets):")
    for (one, other), share in list(twins([result.sheet for result in correct]).items())[:20]:
        print(f"  {one} = {other}: {share:.0%}")


def _speed(quick: bool) -> Iterator[Figure]:
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as folder:
        path = Path(folder, SAMPLES[2].file)
        path.write_bytes(written(SAMPLES[2]))
        run = [sys.executable, "-c", _COLD, str(path)]
        cold = best_of(5, lambda: subprocess.run(run, check=True))
        yield Figure("audit: one workbook with two mistakes, cold start", cold, "s", at_most=2.0)
        count = 60 if quick else 1000
        paths = _folder(Path(folder), count)
        yield Figure(f"audit: sheets a second a core, {count} in a folder", count / _busy(paths), "", at_least=20.0)


def _folder(folder: Path, count: int) -> list[Path]:
    """So many sheets: every layout, a third of them right, a third with one mistake, a third with two."""
    rng = random.Random(SEED)
    singles = list(SLIPS)
    pairs = drawn_pairs(SEED, len(singles))
    paths: list[Path] = []
    for layout in cycle(LAYOUTS):
        if len(paths) == count:
            break
        kind = len(paths) % 3
        slips = ((), (rng.choice(singles),), rng.choice(pairs))[kind]
        sheet = made(rng, layout, slips)
        if sheet is not None:
            paths.append(folder / f"{len(paths):04d}.{sheet.kind}")
            paths[-1].write_bytes(sheet.data)
    return paths


def _busy(paths: Sequence[Path]) -> float:
    """Seconds of the processor for all of them, after start-up."""
    from lowpoint.audit.auditing import audit_document
    from lowpoint.audit.reading import read_sheet

    for path in paths[:6]:
        audit_document(read_sheet(path))
    start = time.process_time()
    for path in paths:
        audit_document(read_sheet(path))
    return time.process_time() - start
