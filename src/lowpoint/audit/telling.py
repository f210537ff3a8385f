"""An audit in lines for a terminal: what was read, then what differs and why it may, what contradicts, what is open.

A suspect is told as what would follow, never as what happened; suspects that explain equally well stand together.
"""

from __future__ import annotations

import math
import re
import textwrap
from collections.abc import Iterable, Iterator, Sequence

from lowpoint.audit.explaining import NOT_TRIED, Explanation, explanations, follows_text, letters_of, unexplained
from lowpoint.audit.model import Audit, Claim, Document, Finding, SheetReading, Suspect

__all__ = ["EXPLAINS", "GROUPS", "WIDTH", "atmosphere_words", "audit_lines", "explaining_lines", "label_of",
           "statement", "suspect_lines", "tally"]  # fmt: skip

WIDTH = 100
GROUPS = {
    "differs": "Differs",
    "contradicts": "Contradicts itself",
    "unchecked": "Not checked",
    "agrees": "Agrees",
}
"""Verdicts in the order in which they are told."""
EXPLAINS = "What would explain it, which only the vendor can tell"
MOST = 8
"""Suspects of a sheet that a terminal is told; the workbook has them all."""
_SOURCES = {
    "sheet": "given on the sheet",
    "elevation": "from the elevation on the sheet",
    "option": "given on the command line",
    "assumed": "assumed: the standard atmosphere",
}


def audit_lines(audit: Audit, *, every: bool = False, width: int = WIDTH) -> list[str]:
    """The audit of one file within ``width`` columns; ``every`` lists the claims that agree, too."""
    document = audit.document
    lines: list[str] = []
    for sheet, claims, questions in zip(document.sheets, audit.claims, audit.questions, strict=True):
        lines += [*_head(document, sheet, width), *_verdicts(claims, every, width)]
        lines += _found("Of the sheet itself", sheet.findings, width)
        if questions:
            what = "question" if len(questions) == 1 else "questions"
            lines += ["", f"{len(questions)} {what} to the vendor: see the workbook of -o"]
        lines.append("")
    if not document.sheets:
        lines.append(document.path)
    lines += _found("Of the file", document.findings, width)
    return lines[:-1] if lines[-1] == "" else lines


def label_of(claim: Claim) -> str:
    """``coefficient, normal (Sheet1!D12)``."""
    case = f", {claim.case}" if claim.case else ""
    return f"{claim.quantity}{case}" + (f" ({claim.cell})" if claim.cell else "")


def statement(claim: Claim) -> str:
    """The sentence of a claim without its suspects, which are told by themselves."""
    if not claim.suspects:
        return claim.text
    return claim.text.partition(f"; {claim.suspects[0].text}")[0]


def suspect_lines(claim: Claim) -> list[str]:
    """Each suspect of one claim in a sentence, likeliest first, for where the claim stands by itself."""
    tied = _tied(claim)
    lines = [f"{suspect.text}{_besides(suspect)}" for suspect in claim.suspects]
    for place in range(1, tied):
        lines[place] = f"equally well: {lines[place]}"
    more = claim.suspects[0].equal + 1 - tied if claim.suspects else 0
    if more > 0:
        lines.insert(tied, f"{more} more would explain it equally well")
    return lines


def explaining_lines(claims: Sequence[Claim], explained: Sequence[Explanation]) -> list[tuple[str, str]]:
    """What would explain the claims that differ: of each suspect a letter and a sentence, then under no letter its
    numbers and what else is to be said."""
    differing = sum(claim.verdict == "differs" for claim in claims)
    lines: list[tuple[str, str]] = []
    for one in explained:
        as_well = "equally well, " if one.equal else ""
        lines.append((one.letter, f"{as_well}{len(one.explains)} of {differing} that differ would follow if "
                      f"{one.phrase}:"))  # fmt: skip
        lines.append(("", follows_text(one)))
        if one.unlisted:
            lines.append(("", f"({one.unlisted} more would explain as much, and cannot be told apart by the numbers)"))
    bare, untried = unexplained(claims)
    if bare:
        lines.append(("-", f"{bare} of {differing} that differ follow{'s' if bare == 1 else ''} from none of the usual "
                      "mistakes, alone or in pairs"))  # fmt: skip
    if untried:
        lines.append(("-", f"not tried: the usual mistakes on {', '.join(untried)}"))
    return lines


def tally(claims: Iterable[Claim]) -> str:
    """``12 claims: 2 differ, 9 agree, 1 not checked``."""
    verdicts = [claim.verdict for claim in claims]
    words = {"differs": ("differs", "differ"), "contradicts": ("contradicts itself", "contradict themselves"),
             "unchecked": ("not checked", "not checked"), "agrees": ("agrees", "agree")}  # fmt: skip
    counts = [(verdicts.count(verdict), words[verdict]) for verdict in GROUPS]
    told = ", ".join(f"{count} {one if count == 1 else many}" for count, (one, many) in counts if count)
    return f"{len(verdicts)} claim{'' if len(verdicts) == 1 else 's'}" + (f": {told}" if told else "")


def atmosphere_words(sheet: SheetReading) -> str:
    """What gauge pressures were counted from, and who says so."""
    return f"{sheet.atmosphere / 1e5:.6g} bar ({_SOURCES.get(sheet.atmosphere_from, sheet.atmosphere_from)})"


def _head(document: Document, sheet: SheetReading, width: int) -> Iterator[str]:
    where = f", sheet '{sheet.name}'" if document.format == "xlsx" or len(document.sheets) > 1 else ""
    title = f"{document.path}{where}"
    yield title
    yield "=" * min(len(title), width)
    cases = [case for case in sheet.cases if case]
    named = f"cases {', '.join(cases)}" if cases else "one case"
    yield from _wrapped(f"Item {sheet.tag or 'without a tag'}, {named}".removesuffix(".") + ".", "", width)
    gauge = any(value.gauge for value in sheet.values)
    told = f" Gauge pressures count from {atmosphere_words(sheet)}." if gauge else ""
    doubtful = sum(value.confidence < 0.8 for value in sheet.values)
    unsure = f", {doubtful} of them with a confidence below 0.8 (--show tells which)" if doubtful else ""
    remarks = "1 remark" if len(sheet.notes) == 1 else f"{len(sheet.notes)} remarks"
    notes = f" {remarks} on how it was read: --show." if sheet.notes else ""
    yield from _wrapped(f"{len(sheet.values)} values were read{unsure}.{told}{notes}", "", width)


def _verdicts(claims: Sequence[Claim], every: bool, width: int) -> Iterator[str]:
    yield f"{tally(claims)}."
    explained = explanations(claims)
    yield from _explaining(claims, explained, width)
    for verdict, title in GROUPS.items():
        group = [claim for claim in claims if claim.verdict == verdict]
        if not group or (verdict == "agrees" and not every):
            continue
        yield ""
        yield title
        yield "-" * len(title)
        shared = _shared_basis(group)
        if shared:
            yield from _wrapped(f"of each: {shared}", "  ", width)
        for lines in _merged(group, explained, shared, width):
            yield from lines
    agreeing = sum(claim.verdict == "agrees" for claim in claims)
    if agreeing and not every:
        yield ""
        yield f"{agreeing} claim{' agrees' if agreeing == 1 else 's agree'}: --all lists them"


def _explaining(claims: Sequence[Claim], explained: Sequence[Explanation], width: int) -> Iterator[str]:
    """The suspects of a whole sheet, each once."""
    lines = explaining_lines(claims, explained[:MOST])
    if not lines:
        return
    yield from ("", EXPLAINS, "-" * len(EXPLAINS))
    for letter, sentence in lines:
        yield from _wrapped(sentence, f"  {letter:<3}" if letter else "       ", width)
    if len(explained) > MOST:
        yield f"  and {len(explained) - MOST} more that explain less: see the workbook of -o"


def _shared_basis(group: Sequence[Claim]) -> str:
    """What the comparisons of several claims rest on, where it is the same for all."""
    tails = {_tail(claim) for claim in group} if group[0].verdict == "differs" and len(group) > 1 else {""}
    return tails.pop() if len(tails) == 1 else ""


def _tail(claim: Claim) -> str:
    """What a comparison rests on, behind the shares of its tolerance."""
    return claim.basis.partition("; ")[2] if math.isfinite(claim.tolerance) else ""


def _merged(group: Sequence[Claim], explained: Sequence[Explanation], shared: str, width: int) -> Iterator[list[str]]:
    """The claims of one verdict; what is open for the same reason in several cases is told once."""
    if group[0].verdict != "unchecked":
        for claim in group:
            yield list(_claim(claim, explained, shared, width))
        return
    alike: dict[tuple[str, str], list[Claim]] = {}
    for claim in group:
        alike.setdefault((claim.quantity, claim.text), []).append(claim)
    for (quantity, text), claims in alike.items():
        cases = list(dict.fromkeys(claim.case for claim in claims if claim.case))
        cells = list(dict.fromkeys(claim.cell for claim in claims if claim.cell))
        of = f", {', '.join(cases)}" if cases else ""
        place = f" ({'; '.join(cells)})" if cells else ""
        yield [*_wrapped(f"{quantity}{of}{place}", "  ", width), *_wrapped(text, "      ", width)]


def _claim(claim: Claim, explained: Sequence[Explanation], shared: str, width: int) -> Iterator[str]:
    letters = ", ".join(letter for letter, _ in letters_of(claim, explained))
    would = f"; would follow: {letters}" if letters else ""
    yield from _wrapped(f"{label_of(claim)}: {_short(claim)}{would}", "  ", width)
    if claim.verdict == "differs" and math.isfinite(claim.tolerance):
        unit = f" {claim.unit}" if claim.unit else ""
        basis = claim.basis.removesuffix(f"; {shared}") if shared else claim.basis
        yield from _wrapped(f"tolerance {claim.tolerance:.3g}{unit}: {basis}", "      ", width)
    elif claim.claimed_word is not None:
        yield from _wrapped(claim.basis.removesuffix(f"; {NOT_TRIED}"), "      ", width)


def _short(claim: Claim) -> str:
    """The sentence of a claim without the name of its quantity, which stands before it; an index keeps its form."""
    said = statement(claim)
    what, colon, rest = said.partition(": ")
    if claim.claimed_word is not None or claim.verdict not in ("differs", "agrees") or not colon:
        return said
    form = re.search(r"\(p.*\)", what)
    return f"{form[0]} {rest}" if form else rest


def _besides(suspect: Suspect) -> str:
    """How much else follows from the same mistakes."""
    others = len(suspect.explains) - 1
    return f" (and so do{'es' if others == 1 else ''} {others} more)" if others > 0 else ""


def _tied(claim: Claim) -> int:
    """How many of the suspects that are shown explain as well as the first."""
    if not claim.suspects:
        return 0
    first = claim.suspects[0]
    alike = [s for s in claim.suspects if s.equal == first.equal and set(s.explains) == set(first.explains)]
    return min(len(alike), first.equal + 1)


def _found(title: str, findings: Sequence[Finding], width: int) -> Iterator[str]:
    if findings:
        yield ""
        yield title
        yield "-" * len(title)
        for finding in findings:
            yield from _wrapped(f"{finding.kind}: {finding.sentence()}", "  - ", width)


def _wrapped(text: str, first: str, width: int) -> list[str]:
    under = " " * len(first)
    plain = " ".join(text.split())
    return textwrap.wrap(plain, width, initial_indent=first, subsequent_indent=under, break_on_hyphens=False)
