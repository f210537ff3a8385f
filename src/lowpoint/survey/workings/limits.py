"""The limits of a valve, step by step: as stated, in upstream form, at this size and head, between its reducers."""

from __future__ import annotations

from lowpoint.survey.limiting import LIMITS
from lowpoint.survey.workings.opening import read_at
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.stated import LIMIT_SYMBOLS, metric

__all__ = ["stated_limit", "write_limits"]

TO_UPSTREAM = {"downstream": "{0} + 1", "xf": "1/{0}"}
METHODS = {
    "isa": ("({0}*SSE - 1)*PSE + 1", "ISA-RP75.23", ""),
    "upstream": ("{0}*SSE*PSE", "definition", "both effects on the upstream form, as the list asks"),
    "tullis": ("({0} - 1)*SSE*PSE + 1", "Tullis", "the form of this method is from memory"),
}


def write_limits(paper: Paper, row: Row) -> None:
    """Every limit that the case has, but choking, which never scales."""
    for name in LIMITS:
        if not there(row.found(name)):
            continue
        paper.section(f"Limit: {name}")
        symbol = stated_limit(paper, row, name)
        if symbol:
            symbol = _scaled(paper, row, name, symbol)
        elif name == "incipient":
            symbol = _acoustic(paper, row)
        if symbol:
            _installed(paper, row, name, symbol)


def stated_limit(paper: Paper, row: Row, name: str) -> str:
    """A limit of the list or of the vendor's table in upstream form: its symbol so far, empty where there is none."""
    symbol = LIMIT_SYMBOLS[name]
    table = row.table
    basis = row.word("limits_basis") or "not stated, taken as tested"
    if row.has(name):
        stated, form = f"{symbol}_stated", row.form
        paper.take(stated, f"{name} limit as stated, {form} form", row.number(name), "", row.where(name),
                   f"basis: {basis}")  # fmt: skip
        if form not in TO_UPSTREAM:
            return stated
        paper.work(f"{symbol}_up", "in upstream form", TO_UPSTREAM[form].format(stated), "", "definition")
        return f"{symbol}_up"
    if table is not None and read_at(paper, table, name, f"{symbol}_table", f"{name} limit, upstream form"):
        return f"{symbol}_table"
    return ""


def _scaled(paper: Paper, row: Row, name: str, symbol: str) -> str:
    """The limit at this size and head, where what that needs is given."""
    by_size = row.has("size_ref", "size_exponent", "valve_size")
    by_head = row.has("head_ref", "head_exponent")
    if not (by_size or by_head):
        paper.say("scale", "effect of size and head", "none", "as the list gives it", "test size and head, or their "
                  "exponents, are not given: a larger size or head would raise the limit")  # fmt: skip
        return symbol
    _effects(paper, row, by_size, by_head)
    equation, source, note = METHODS[row.word("method") or "isa"]
    of = f"{LIMIT_SYMBOLS[name]}_scaled"
    paper.work(of, "at this size and head", equation.format(symbol), "", source, note, f"{name}_scaled")
    return of


def _effects(paper: Paper, row: Row, by_size: bool, by_head: bool) -> None:
    """The factors of size and head, written once for all limits."""
    if paper.has("SSE", "PSE"):
        return
    if by_size:
        paper.take("d_ref", "valve size of the test", metric(row.number("size_ref"), "mm"), "mm", row.where("size_ref"))
        paper.take("b", "exponent of the size effect", row.number("size_exponent"), "", row.where("size_exponent"))
        paper.work("SSE", "size effect, never below 1", "max((d/d_ref)^b, 1)", "", "ISA-RP75.23")
    else:
        paper.take("SSE", "size effect", 1.0, "", "test size or exponent not given")
    if by_head:
        paper.take("H_ref", "p1 - pv of the test", metric(row.number("head_ref"), "bar"), "bar", row.where("head_ref"))
        paper.take("a", "exponent of the pressure effect", row.number("head_exponent"), "", row.where("head_exponent"))
        paper.work("PSE", "pressure effect, never below 1", "max(((p1 - pv)/H_ref)^a, 1)", "", "ISA-RP75.23")
    else:
        paper.take("PSE", "pressure effect", 1.0, "", "test head or exponent not given")


def _acoustic(paper: Paper, row: Row) -> str:
    """The incipient limit from xFz: tested, of the table, or estimated, carried to this inlet pressure."""
    table = row.table
    noise = "IEC 60534-8-4"
    if row.has("xfz"):
        paper.take("xFz", "xF of inception at 6 bar", row.number("xfz"), "", row.where("xfz"))
    elif table is None or not read_at(paper, table, "xfz", "xFz", "xF of inception at 6 bar"):
        paper.work("Cv", "the coefficient in Cv", "1.156*C", "Cv", "SI brochure")
        paper.work("xFz", "estimated xF of inception at 6 bar", "0.9/sqrt(1 + 3*Fd*sqrt(Cv/(1.17*FL)))", "", noise,
                   "an acoustic estimate, never a damage limit")  # fmt: skip
    paper.work("xFz_p1", "at this inlet pressure", "xFz*(6/p1)^0.125", "", noise)
    paper.work("sigma_i_scaled", "as a limit in upstream form", "1/xFz_p1", "", "definition",
               finding="incipient_scaled")  # fmt: skip
    return "sigma_i_scaled"


def _installed(paper: Paper, row: Row, name: str, symbol: str) -> None:
    """The limit as it holds between the reducers, with the pressures outside them."""
    final = LIMIT_SYMBOLS[name]
    if paper.has("c", "FP"):
        paper.work(final, f"{name} limit between the reducers", f"FP^2*({symbol} + (K1 + KB1)*c)", "", "closed form",
                   finding=name)  # fmt: skip
    else:
        paper.work(final, f"{name} limit", symbol, "", "definition", "no fittings", name)
