"""A comparison for the eye and for machines."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from lowpoint import __version__
from lowpoint.problems import counted
from lowpoint.survey.as_json import number
from lowpoint.survey.comparing import BETTER, TURNS, WORSE, Change, Comparison, Drift, Turn
from lowpoint.survey.inputs import heading_of, unit_of, value_text
from lowpoint.survey.items import verdict
from lowpoint.survey.sides import Side, Verdicts

__all__ = ["comparison_json", "comparison_lines"]

SHOWN = 20
"""Lines of one kind that are printed before the rest is counted."""
UNCHANGED = "inputs unchanged"


# --- lines ------------------------------------------------------------------------------------------------------


def comparison_lines(found: Comparison, system: str = "metric", most: int = SHOWN) -> Iterator[str]:
    """What differs, the worst first."""
    yield f"old: {_described(found.old)}"
    yield f"new: {_described(found.new)}"
    yield from (f"note: {note}" for note in found.notes)
    yield from _listed("items gone", found.items_gone, most)
    yield from _listed("items added", _added_items(found), most)
    gone, added = _single(found.old, found.gone, found.items_gone), _single(found.new, found.added, found.items_added)
    yield from _listed("cases gone of items that stayed", [_name(found.old, place) for place in gone], most)
    states = [f"{_name(found.new, place)}: {_state(found.new.verdicts, place)}" for place in added]
    yield from _listed("cases added to items that stayed", states, most)
    for what in TURNS:
        turns = [turn for turn in found.turns if turn.what == what]
        yield from _listed(what, [_turn_line(found, turn, system) for turn in turns], most)  # fmt: skip
    yield from _quiet(found, system, most)
    yield from _drift_lines(found, most)
    for side, which in ((found.old, "old"), (found.new, "new")):
        yield from _listed(f"wrong with the {which} list", side.problems, most)
    yield _sum(found)


def _described(side: Side) -> str:
    items = counted(len({*side.cases.tag.tolist()}), "item")
    size = f"{items}, {counted(side.cases.count, 'case')}"
    if side.kind == "list":
        return f"{side.name}, a list judged now (version {__version__}): {size}"
    version = f"version {side.version}" if side.version else "a version that it does not tell"
    return f"{side.name}, a survey issued by {version}: {size}"


def _listed(what: str, lines: Sequence[str], most: int) -> Iterator[str]:
    if lines:
        yield f"{what} ({len(lines)}):"
        yield from (f"  {line}" for line in lines[:most])
        if len(lines) > most:
            yield f"  ... and {len(lines) - most} more; --json names them all"


def _name(side: Side, place: int) -> str:
    case = side.cases.case[place]
    return f"{side.cases.tag[place]} {case}" if case else str(side.cases.tag[place])


def _single(side: Side, places: Sequence[int], items: Sequence[str]) -> list[int]:
    """The cases whose item is on both sides."""
    whole = {*items}
    return [place for place in places if side.cases.tag[place] not in whole]


def _added_items(found: Comparison) -> list[str]:
    """Items that came in, with what is wrong with them."""
    verdicts, cases = found.new.verdicts, found.new.cases
    failing: dict[str, list[int]] = {tag: [] for tag in found.items_added}
    for place in found.added:
        tag = cases.tag[place]
        if tag in failing and (verdicts.fails[place] or verdicts.regime[place] is None):
            failing[tag].append(place)
    return [tag + "".join(f"; {cases.case[place] or 'its case'}: {_state(verdicts, place)}" for place in places)
            for tag, places in failing.items()]  # fmt: skip


def _state(verdicts: Verdicts, place: int) -> str:
    """``damage (tested) -3.2 %, fails``."""
    margin = number(float(verdicts.margin[place]))
    said = verdict(verdicts.regime[place], verdicts.basis[place])
    said += "" if margin is None else f" {100.0 * margin:+.1f} %"
    return said + (", fails" if verdicts.fails[place] else "")


def _turn_line(found: Comparison, turn: Turn, system: str) -> str:
    before, after = _state(found.old.verdicts, turn.old), _state(found.new.verdicts, turn.new)
    changes = _changes_text(found.changes_of(turn), system) or UNCHANGED
    why = ""
    if turn.what == TURNS[1] and found.new.errors[turn.new]:
        why = f"; because {found.new.errors[turn.new][0]}"
    return f"{_name(found.new, turn.new)}: {before} -> {after}{why}; {changes}"


def _changes_text(changes: Sequence[Change], system: str) -> str:
    return "; ".join(f"{heading_of(c.field)} {value_text(c.field, c.old, system)} -> "
                     f"{value_text(c.field, c.new, system)}" for c in changes)  # fmt: skip


def _quiet(found: Comparison, system: str, most: int) -> Iterator[str]:
    """Changed inputs of cases whose verdict stayed."""
    turned = {turn.pair for turn in found.turns}
    lines = [f"{_name(found.new, found.pairs[pair][1])}: {_changes_text(changes, system)}"
             for pair, changes in sorted(found.changes.items()) if pair not in turned]  # fmt: skip
    yield from _listed("inputs changed, verdict as before", lines, most)


def _drift_lines(found: Comparison, most: int) -> Iterator[str]:
    for side, which in ((found.old, "old"), (found.new, "new")):
        assert side.today is not None or side.kind == "list"
        lines = [_drift_line(side, drift) for drift in found.drifts if drift.side == which]
        version = side.version or "unknown"
        yield from _listed(f"the tool gives another verdict for unchanged inputs of {side.name}: version {version} -> "
                           f"{__version__}", lines, most)  # fmt: skip


def _drift_line(side: Side, drift: Drift) -> str:
    today = side.today
    after = "" if today is None else _state(today, drift.place)
    return f"{_name(side, drift.place)}: {_state(side.verdicts, drift.place)} -> {after}"


def _sum(found: Comparison) -> str:
    worse = sum(turn.what in WORSE for turn in found.turns)
    better = sum(turn.what in BETTER for turn in found.turns)
    parts = [
        f"{counted(len(found.pairs), 'case')} in both",
        f"{len(found.changes)} with changed inputs",
        f"{worse} worse",
        f"{better} better",
        f"{len(found.added)} added",
        f"{len(found.gone)} gone",
    ]
    return ", ".join(parts)


# --- for machines -----------------------------------------------------------------------------------------------


def comparison_json(found: Comparison, system: str = "metric") -> dict[str, Any]:
    """The whole comparison; numbers plain, in the unit beside them."""
    return {
        "old": _side_json(found.old), "new": _side_json(found.new), "version": __version__, "units": system,
        "notes": list(found.notes),
        "items": {"gone": list(found.items_gone), "added": list(found.items_added)},
        "cases": {"gone": [_case_json(found.old, place) for place in found.gone],
                  "added": [_case_json(found.new, place) for place in found.added]},
        "changed": [{**_named(found.new, found.pairs[pair][1]), "changes": _changes_json(changes, system)}
                    for pair, changes in sorted(found.changes.items())],
        "turned": [_turn_json(found, turn, system) for turn in found.turns],
        "drifted": [_drift_json(found, drift) for drift in found.drifts],
        "exit_code": found.exit_code,
    }  # fmt: skip


def _side_json(side: Side) -> dict[str, Any]:
    return {"file": side.name, "kind": side.kind, "version": side.version or None, "cases": side.cases.count,
            "items": len({*side.cases.tag.tolist()}), "problems": list(side.problems)}  # fmt: skip


def _named(side: Side, place: int) -> dict[str, Any]:
    return {"tag": side.cases.tag[place], "case": side.cases.case[place]}


def _case_json(side: Side, place: int) -> dict[str, Any]:
    return _named(side, place) | _verdict_json(side.verdicts, place)


def _verdict_json(verdicts: Verdicts, place: int) -> dict[str, Any]:
    return {"regime": verdicts.regime[place], "basis": verdicts.basis[place],
            "margin": number(float(verdicts.margin[place])), "fails": bool(verdicts.fails[place])}  # fmt: skip


def _changes_json(changes: Sequence[Change], system: str) -> list[dict[str, Any]]:
    return [{"field": c.field, "heading": heading_of(c.field), **_values_json(c, system)} for c in changes]


def _values_json(change: Change, system: str) -> dict[str, Any]:
    plain = all(x is None or isinstance(x, str) for x in (change.old, change.new))
    unit = None if plain else unit_of(change.field, system)

    def shown(x: Any) -> Any:
        if unit is None or x is None or isinstance(x, str):
            return x
        return [unit.from_si(v) for v in x] if isinstance(x, tuple) else unit.from_si(x)

    return {"old": shown(change.old), "new": shown(change.new), "unit": unit.label or None if unit else None}


def _turn_json(found: Comparison, turn: Turn, system: str) -> dict[str, Any]:
    return {
        **_named(found.new, turn.new), "what": turn.what, "worse": turn.what in WORSE,
        "old": _verdict_json(found.old.verdicts, turn.old), "new": _verdict_json(found.new.verdicts, turn.new),
        "changes": _changes_json(found.changes_of(turn), system), "errors": list(found.new.errors[turn.new]),
    }  # fmt: skip


def _drift_json(found: Comparison, drift: Drift) -> dict[str, Any]:
    side = found.old if drift.side == "old" else found.new
    today = None if side.today is None else _verdict_json(side.today, drift.place)
    return {"side": drift.side, **_named(side, drift.place), "issued": _verdict_json(side.verdicts, drift.place),
            "today": today}  # fmt: skip
