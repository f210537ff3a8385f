"""The page of one failing item: its cases side by side, pictures, remedies, how sure it is, and the working."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from lowpoint.survey.items import verdict
from lowpoint.survey.model import Item, Survey
from lowpoint.survey.outcome import Remedy, Working
from lowpoint.survey.page.contents import case_name
from lowpoint.survey.page.drawing import svg
from lowpoint.survey.page.numbers import measured
from lowpoint.survey.page.rows import ItemColumn, item_columns, item_rows
from lowpoint.survey.pictures import index_picture, pressure_picture
from lowpoint.survey.sensed import sensed_words
from lowpoint.survey.working import working

__all__ = ["ItemPage", "Said", "ShownRemedy", "item_pages"]


@dataclass(frozen=True)
class Said:
    """A sentence, and the cases that it is said of."""

    text: str
    cases: str


@dataclass(frozen=True)
class ShownRemedy:
    """A remedy with its numbers in the page's units."""

    remedy: Remedy
    figures: tuple[tuple[str, str], ...]
    outcome: str
    """Least margin and the verdict of each case, in words."""


@dataclass(frozen=True)
class ItemPage:
    """Everything that stands on the page of an item."""

    number: int
    item: Item
    verdict: str
    cases: tuple[str, ...]
    worst: int
    """Place of the worst case among ``cases``."""
    rows: tuple[tuple[str, list[str]], ...]
    notes: tuple[Said, ...]
    pictures: tuple[str, ...]
    """SVG."""
    remedies: tuple[ShownRemedy, ...]
    sensitivity: str
    working: Working

    @property
    def noted(self) -> frozenset[str]:
        """Cautions that the page shows already, which its working need not repeat."""
        return frozenset(said.text for said in self.notes)


def item_pages(survey: Survey, items: Sequence[Item], system: str) -> list[ItemPage]:
    """Pages of these items, numbered from 1."""
    columns = item_columns(survey, system) if items else []
    return [_page(survey, item, number, system, columns) for number, item in enumerate(items, start=1)]


def _page(survey: Survey, item: Item, number: int, system: str,
          columns: Sequence[ItemColumn]) -> ItemPage:  # fmt: skip
    pictures = (pressure_picture(survey, item.worst, system), index_picture(survey, item, system))
    return ItemPage(
        number=number, item=item, verdict=verdict(item.regime, item.basis),
        cases=tuple(case_name(survey, place) for place in item.rows), worst=item.rows.index(item.worst),
        rows=tuple(item_rows(columns, item.rows)), notes=tuple(_notes(survey, item)),
        pictures=tuple(svg(picture, f"picture-{number}-{n}") for n, picture in enumerate(pictures, start=1)),
        remedies=tuple(_remedy(survey, item, remedy, system) for remedy in survey.remedies.get(item.tag, ())),
        sensitivity=sensed_words(survey, item.worst, system),
        working=working(survey, item.worst, system),
    )  # fmt: skip


def _notes(survey: Survey, item: Item) -> list[Said]:
    """Cautions and errors, each once, with the cases that have it."""
    whose: dict[str, list[str]] = {}
    for place in item.rows:
        for text in (*survey.findings.errors[place], *survey.findings.cautions[place]):
            names = whose.setdefault(text, [])
            if case_name(survey, place) not in names:
                names.append(case_name(survey, place))
    return [Said(text, "" if len(names) == len(item.rows) else ", ".join(names)) for text, names in whose.items()]


def _remedy(survey: Survey, item: Item, remedy: Remedy, system: str) -> ShownRemedy:
    figures = tuple((name, measured(value, kind, system)) for name, (value, kind) in remedy.figures.items())
    margin = f"Least margin {100.0 * remedy.margin:+.1f} %. " if remedy.margin == remedy.margin else ""
    names = (case_name(survey, place) for place in item.rows)
    states = [f"{name} {regime or 'no answer'}" for name, regime in zip(names, remedy.verdicts, strict=False)]
    return ShownRemedy(remedy, figures, margin + (f"By case: {', '.join(states)}." if states else ""))
