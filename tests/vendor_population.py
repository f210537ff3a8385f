"""A population of vendors' sheets as files of all layouts, read and audited: what was found, and what was not."""

from __future__ import annotations

import random
import tempfile
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations, cycle
from pathlib import Path

from audit_population import ONE_THING, Trial, graded
from lowpoint.audit.auditing import audit_document
from lowpoint.audit.model import Audit, Claim, SheetReading, Suspect
from lowpoint.audit.reading import read_sheet
from vendor_layouts import LAYOUTS
from vendor_rows import lines_of
from vendor_sheets import Sheet, made
from vendor_slips import SLIPS, Printed, able, printed

__all__ = ["Result", "audited", "drawn_pairs", "label_table", "plain", "population", "result",
           "same_print", "suspect_table", "twins", "visible"]  # fmt: skip


@dataclass(frozen=True)
class Result:
    """One sheet, audited."""

    sheet: Sheet
    trial: Trial
    right: int
    """Quantities found in their cell and case."""
    missed: tuple[str, ...]
    """Quantities that were not."""
    false: tuple[str, ...]
    """On a correct sheet: everything that an engineer would be made to look at."""
    rivals: tuple[str, ...] = ()
    """Of mistakes not named first: what is named first instead."""

    @property
    def proved(self) -> bool:
        """Does plain arithmetic with each rival print the same numbers, so that nobody could tell them apart?"""
        return bool(self.rivals) and all(same_print(self.sheet, rival) for rival in self.rivals)


def audited(sheet: Sheet, folder: Path) -> Audit:
    """The sheet written to a file, read and judged."""
    path = folder / f"sheet.{sheet.kind}"
    path.write_bytes(sheet.data)
    return audit_document(read_sheet(path))


def result(sheet: Sheet, audit: Audit) -> Result:
    """What an audit made of a sheet."""
    readings = audit.document.sheets
    found = {(v.quantity, _case(sheet, r, v.case), v.cell) for r in readings for v in r.values}
    keys = [((key, case or None, cell) in found, key) for (key, case), cell in sheet.places.items()]
    missed = tuple(key for hit, key in keys if not hit)
    claims = [claim for several in audit.claims for claim in several]
    wrong = [claim for claim in claims if claim.verdict == "differs"]
    false = [f"{c.quantity} {c.case}: {c.text}" for c in claims if c.verdict in ("differs", "contradicts")]
    findings = [f for r in readings for f in r.findings] + list(audit.document.findings)
    false += [finding.sentence() for finding in findings]
    trial = _trial(sheet, audit, wrong)
    rivals = () if trial.first or not sheet.slips else _rivals(sheet, audit, wrong)
    return Result(sheet, trial, len(keys) - len(missed), missed, tuple(false), rivals)


def _rivals(sheet: Sheet, audit: Audit, wrong: Sequence[Claim]) -> tuple[str, ...]:
    """What is named first in place of the right mistakes, each set of them by the sign + ; of mistakes that are named
    one by one all together. Empty where a claim has no suspect at all."""
    if not wrong or not all(claim.suspects for claim in wrong):
        return ()
    first = {_in_our_words(sheet, audit.document.sheets[0], claim.suspects[0]).mistakes for claim in wrong}
    together = tuple(sorted({mistake for mistakes in first for mistake in mistakes}))
    if len(together) <= max(2, len(sheet.slips)):
        first = {together}
    return tuple(sorted(" + ".join(mistakes) for mistakes in first if set(mistakes) != set(sheet.slips)))


NEAR = {"dp_choked": 0.012, "sigma_choked": 0.012, "flp": 0.006}
NEAREST = 0.003
"""Share by which printed numbers may differ and still be one number, for the rounding of the inputs: of FL (two
decimals, half of the last is 0.6 %) in FL and in its square, of pressures and flows in all else."""
PRACTICE = 0.006
"""Share by which they may differ without a finding, rounding included."""


def same_print(sheet: Sheet, rival: str) -> bool:
    """Would the vendor have printed these numbers with this mistake too? By plain arithmetic, within rounding."""
    names = tuple(rival.split(" + "))
    if not set(names) <= set(SLIPS) or not able(sheet.item, names):
        return False
    other, own = (printed(sheet.item, slips) for slips in (names, sheet.slips))
    if other is None or own is None:
        return False
    return _alike(_numbers(sheet, other), _numbers(sheet, own))


def twins(items: Sequence[Sheet]) -> dict[tuple[str, str], float]:
    """Pairs of single mistakes, with the share of these sheets on which both print the same numbers (and other ones
    than a right sheet)."""
    found: Counter[tuple[str, str]] = Counter()
    seen: Counter[tuple[str, str]] = Counter()
    for sheet in items:
        prints = {}
        for name, slip in SLIPS.items():
            lines = printed(sheet.item, (name,)) if slip.possible(sheet.item) else None
            if lines is not None:
                prints[name] = _numbers(sheet, lines)
        right = _numbers(sheet, printed(sheet.item) or [])
        moving = {name: numbers for name, numbers in prints.items() if not _alike(numbers, right)}
        for one, other in combinations(moving, 2):
            seen[one, other] += 1
            found[one, other] += _alike(moving[one], moving[other])
    return {pair: count / seen[pair] for pair, count in found.most_common() if count}


Number = tuple[str, float, float]
"""Quantity, printed number, last digit."""


def _numbers(sheet: Sheet, found: list[Printed]) -> list[Number]:
    """Every printed number."""
    return [(line.key, number, 10.0**-line.decimals) for line in lines_of(sheet.item, found, sheet.wording)
            for number in line.numbers.values()]  # fmt: skip


def _alike(one: list[Number], other: list[Number], *, practice: bool = False) -> bool:
    """The same numbers within rounding, or within the tolerances of practice (0.5 %); openings within 5 points."""
    return all(abs(a - b) <= _room(key, a, digit, practice)
               for (key, a, digit), (_, b, _) in zip(one, other, strict=True))  # fmt: skip


def _room(key: str, number: float, digit: float, practice: bool) -> float:
    if key == "travel":
        return 5.0 + digit
    return digit + (PRACTICE if practice else NEAR.get(key, NEAREST)) * abs(number)


def plain(sheet: Sheet) -> bool:
    """Do the mistakes move a printed number by so much that no rounding could hide it: 2 %, an opening by 7 points?"""
    wrong, right = printed(sheet.item, sheet.slips), printed(sheet.item)
    if wrong is None or right is None:
        return False
    return any(
        abs(a - b) > (7.0 if key == "travel" else 0.02 * abs(b) + 2.0 * digit)
        for (key, a, digit), (_, b, _) in zip(_numbers(sheet, wrong), _numbers(sheet, right), strict=True)
    )


def visible(sheet: Sheet) -> tuple[str, ...]:
    """The mistakes of a pair without the one that moves nothing beyond the tolerances of practice, by plain
    arithmetic."""
    both = printed(sheet.item, sheet.slips)
    for name in sheet.slips if len(sheet.slips) == 2 and both is not None else ():
        alone = printed(sheet.item, (name,))
        if alone is not None and _alike(_numbers(sheet, both), _numbers(sheet, alone), practice=True):
            return (name,)
    return sheet.slips


def _case(sheet: Sheet, reading: SheetReading, case: str | None) -> str | None:
    """The case in our words: a sheet has its own, in our order."""
    return dict(zip(reading.cases, sheet.item.names, strict=False)).get(case or "", case) or None


def _trial(sheet: Sheet, audit: Audit, wrong: Sequence[Claim]) -> Trial:
    if not sheet.slips:
        return Trial((), len(wrong), not wrong, not wrong, False)
    if not audit.document.sheets:
        return Trial(sheet.slips, 0, False, False, False)
    lists = [tuple(_in_our_words(sheet, audit.document.sheets[0], s) for s in c.suspects) for c in wrong]
    ways = {sheet.slips, visible(sheet)}
    first, three, tied = (any(marks) for marks in zip(*(graded(dict(enumerate(lists)), way) for way in ways),
                                                      strict=True))  # fmt: skip
    return Trial(sheet.slips, len(wrong), first, three, tied and not first)


def _in_our_words(sheet: Sheet, reading: SheetReading, suspect: Suspect) -> Suspect:
    """``flow_of_Min.`` is ``flow_of_minimum`` on every other sheet."""
    words = dict(zip(reading.cases, sheet.item.names, strict=False))
    keys = []
    for key in suspect.mistakes:
        head, of, case = key.partition("_of_")
        keys.append(f"{head}{of}{words.get(case, case)}")
    return replace(suspect, mistakes=tuple(keys))


def population(seed: int, each: int, slips: Iterable[Sequence[str]], *, rotating: bool = False) -> Iterator[Result]:
    """``each`` sheets with each of these sets of mistakes in every layout, or in one layout each, in turn."""
    turn = cycle([(layout,) for layout in LAYOUTS] if rotating else [tuple(LAYOUTS)])
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as folder:
        for names, layouts in zip(slips, turn, strict=False):
            for layout in layouts:
                for number in range(each):
                    sheet = _one(f"{seed} {layout} {number} {'+'.join(names)}", layout, names)
                    if sheet is not None:
                        yield result(sheet, audited(sheet, Path(folder)))


def _one(seed: str, layout: str, names: Sequence[str]) -> Sheet | None:
    """Drawn again a few times where the mistake cannot be made on what was drawn."""
    rng = random.Random(seed)
    return next((sheet for _ in range(6) if (sheet := made(rng, layout, names)) is not None), None)


_SAME = (
    *ONE_THING,
    {name for name in SLIPS if name.startswith("pv_")},
    {name for name in SLIPS if name.startswith("fl_")},
    {name for name in SLIPS if name.startswith(("flow_", "gpm_", "m3h_", "us_", "imperial_"))},
    {name for name in SLIPS if name.startswith(("density_", "relative_", "lb_"))},
    {name for name in SLIPS if name.startswith(("ff_", "choking_", "fl_not", "ratio_not"))},
    {name for name in SLIPS if name.startswith("nominal_") or name in ("no_fittings", "rated_in_fp")},
    {name for name in SLIPS if name in ("cv_over_kvs", "kv_over_cvs", "other_characteristic", "rangeability_30")},
    {name for name in SLIPS
     if name.startswith(("p1_", "p2_", "gauge_", "atmosphere_", "stated_", "bar_", "psi_", "kgf"))},
)  # fmt: skip
"""Two out of one of these undo, replace or contain one another: no two mistakes."""


def drawn_pairs(seed: int, count: int) -> list[tuple[str, str]]:
    """Pairs of mistakes drawn at random, none of which is one thing twice."""
    rng = random.Random(seed)
    found: list[tuple[str, str]] = []
    while len(found) < count:
        one, other = rng.sample(sorted(SLIPS), 2)
        if not any({one, other} <= same for same in _SAME):
            found.append((one, other))
    return found


def label_table(results: Sequence[Result]) -> str:
    """One line a layout: quantities, of which in the right cell and case."""
    lines = [f"{'layout':12s} {'sheets':>6s} {'asked':>6s} {'right':>6s} {'share':>7s}"]
    for layout in (*LAYOUTS, "all"):
        some = [r for r in results if layout in (r.sheet.layout, "all")]
        asked = sum(len(r.sheet.places) for r in some)
        right = sum(r.right for r in some)
        lines.append(f"{layout:12s} {len(some):6d} {asked:6d} {right:6d} {right / max(asked, 1):7.2%}")
    missed = Counter(key for r in results for key in set(r.missed))
    if missed:
        lines.append("missed: " + ", ".join(f"{key} on {count}" for key, count in missed.most_common(8)))
    return "\n".join(lines)


def suspect_table(results: Sequence[Result]) -> str:
    """One line a mistake: sheets, of which with a finding, right first, in the first three, not to be told apart."""
    from audit_population import table

    return table([r.trial for r in results])
