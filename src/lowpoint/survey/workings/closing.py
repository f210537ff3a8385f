"""What follows from index and limits: the index, margins, the verdict with its comparisons, and the allowed drop."""

from __future__ import annotations

from lowpoint.survey.items import verdict
from lowpoint.survey.limiting import LIMITS
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.stated import LIMIT_SYMBOLS

__all__ = ["agrees", "write_index", "write_index_form", "write_margins", "write_verdict"]

SYMBOLS = {**LIMIT_SYMBOLS, "choked": "sigma_choked"}
ORDER = ("choked", "vibration", "damage", "constant", "incipient")
"""The comparisons of the verdict, from the worst state to the mildest."""
FORMS = {"downstream": ("sigma - 1", "(p2 - pv)/(p1 - p2)"), "xf": ("1/sigma", "(p1 - p2)/(p1 - pv)")}
MEANINGS = {
    "clear": "above every limit, the incipient one among them",
    "unjudged": "above every limit given, but no incipient limit is: never clear",
    "flashing": "p2 is at or below pv",
    "choked": "at or below the index at choking",
    "cavitating": "crossed, and no damage limit (or no other than the incipient one) tells how far",
}


def write_index(paper: Paper, row: Row) -> None:
    """The index, in the form of the row too, and the index at which the flow chokes."""
    paper.section("Index")
    paper.work("sigma", "cavitation index, upstream form", "(p1 - pv)/dp", "", "definition", finding="sigma")
    write_index_form(paper, row)
    paper.work("sigma_choked", "index at which the flow chokes, exact", "(p1 - pv)/dp_choked", "", "IEC 60534-2-1",
               "choking never scales", "choked_limit")  # fmt: skip


def write_index_form(paper: Paper, row: Row) -> None:
    """The index in the form of the row, where that is not the upstream one."""
    if row.form in FORMS:
        equation, meaning = FORMS[row.form]
        paper.work("index", f"in {row.form} form, {meaning}", equation, "", "definition", finding="index")


def write_margins(paper: Paper, row: Row) -> None:
    """The margin to each limit, the one that counts, and the drop that it allows."""
    if not paper.has("sigma"):
        return
    paper.section("Margins")
    for name in (*LIMITS, "choked"):
        symbol = SYMBOLS[name]
        paper.work(f"m_{name}", f"margin to the {name} limit", f"100*(sigma/{symbol} - 1)", "%", "definition",
                   finding=f"margin_{name}")  # fmt: skip
    kept = row.found("keep")
    if kept is None or not paper.has(SYMBOLS[kept]):
        return
    paper.say("keep", "limit that the margin counts to", str(kept), *_why_kept(paper, row, str(kept)))
    limit = SYMBOLS[kept]
    if paper.number(limit) > 1.0:
        head = "sigma*dp_plate" if paper.has("dp_plate") else "(p1 - pv)"
        paper.work("dp_allowed", "largest drop that keeps it", f"{head}/{limit}", "bar", "definition",
                   finding="allowed_drop")  # fmt: skip
        if not paper.has("dp_plate"):
            paper.work("p2_allowed", "lowest outlet pressure that keeps it", "p1 - dp_allowed", "bar", "definition",
                       finding="allowed_outlet")  # fmt: skip


def _why_kept(paper: Paper, row: Row, kept: str) -> tuple[str, str]:
    """Where the limit that counts was taken from, and what is to be said of it."""
    asked = row.word("keep")
    if asked == kept:
        return row.where("keep"), ""
    mildest = next(name for name in (*LIMITS, "choked") if paper.has(SYMBOLS[name]))
    there = asked is not None and paper.has(SYMBOLS[asked])
    note = f"'{asked}' is asked for and not given" if asked is not None and not there else ""
    wanted = asked if there else mildest
    if wanted == kept:
        return "the mildest limit that is given", note
    return "the highest of the limit to keep and those more severe", note or f"the {wanted} limit lies below it"


def write_verdict(paper: Paper, row: Row) -> None:
    """The comparisons in order, down to the one that decides; the word; and what it rests on."""
    regime = row.found("regime")
    if not paper.has("sigma"):
        return
    paper.section("Verdict")
    if paper.ask("flashing?", "is the index at or below 1: the outlet at or below pv", "sigma <= 1", "definition"):
        paper.crossed = "flashing"
    for name in ORDER:
        if paper.crossed or not paper.has(SYMBOLS[name]):
            continue
        if paper.ask(f"{name}?", f"is the index at or below the {name} limit", f"sigma <= {SYMBOLS[name]}",
                     "definition"):  # fmt: skip
            paper.crossed = name
    if regime is None:
        return
    meaning = MEANINGS.get(regime, f"at or below the {regime} limit, above the worse ones")
    paper.say("verdict", meaning, verdict(regime, row.found("basis")), "definition", _rests(row))
    if row.found("flashing") and regime != "flashing":
        paper.say("flashing", "and the liquid flashes behind the last plate", "yes", "definition")
    if row.found("choked") and regime != "choked":
        paper.say("choked", "and the flow is choked", "yes", "definition")
    if there(row.found("capacity")) and row.found("over_capacity"):
        paper.say("capacity", "and the flow does not pass", "too small", "definition")


def agrees(paper: Paper, row: Row) -> bool:
    """Do the comparisons of the working decide on the survey's word?"""
    regime = row.found("regime")
    if regime is None or not paper.has("sigma"):
        return True
    if regime in ("clear", "unjudged"):
        return not paper.crossed
    return paper.crossed in (("constant", "incipient") if regime == "cavitating" else (regime,))


def _rests(row: Row) -> str:
    """What the verdict's limits rest on."""
    said = []
    if there(row.found("incipient")) and row.found("incipient_basis"):
        said.append(f"incipient limit {row.found('incipient_basis')}")
    if any(there(row.found(name)) for name in LIMITS[1:]) and row.found("limits_basis"):
        said.append(f"other limits {row.found('limits_basis')}")
    if row.found("fl_basis"):
        said.append(f"FL {row.found('fl_basis')}")
    return ", ".join(said) + "; the verdict shows the weakest that it rests on" if said else ""
