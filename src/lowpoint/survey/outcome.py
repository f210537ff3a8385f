"""What a survey says beyond the verdicts: how far inputs may move, what cures a failure, the working, the pictures.

Plain records that the makers (:mod:`sensing`, :mod:`remedies`, :mod:`working`, :mod:`pictures`) fill and that the
faces of a survey (workbook, page, JSON, terminal) show. Numbers are coherent SI as in :mod:`model`, unless a record
says that it is for the eye.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from lowpoint.survey.model import Cases, Flags, Numbers, Words
from lowpoint.survey.worded import said
from lowpoint.units import dimension

__all__ = ["Line", "Picture", "Remedy", "Sensitivity", "Step", "Tolerance", "Working"]


@dataclass(frozen=True)
class Tolerance:
    """How far one input may be off."""

    field: str
    """Field of :class:`~lowpoint.survey.model.Cases` that moves, or ``limits``."""
    size: float
    """Half-width: a share of the value, or an amount in SI."""
    relative: bool
    basis: str
    """Where it comes from: ``default``, ``list``, ``command line``."""

    def words(self, system: str = "metric") -> str:
        """``± 2 %``, ``± 1 K``, ``± 0.1 bar``; ``± 1.8 deg F`` in US units."""
        if self.relative:
            return f"± {100.0 * self.size:.4g} %"
        unit = dimension({"t": "temperature", "flow": "flow"}.get(self.field, "pressure")).unit(system)
        # A difference of temperatures is told from a temperature.
        label = "K" if unit.label == "deg C" else unit.label
        return f"± {self.size / unit.factor:.4g} {label}"


@dataclass(frozen=True, eq=False)
class Sensitivity:
    """The margin under uncertain inputs, one element a case; NaN and None where the case has no answer."""

    tolerances: tuple[Tolerance, ...]
    draws: int
    seed: int
    low: Numbers
    """Margin with every input at its adverse end; not above the least that an input alone, or a draw, gave."""
    high: Numbers
    """Margin with every input at its favourable end; not below the largest."""
    stays: Numbers
    """Share of draws in which the case does not fail, 0 to 1. A nominal failure stays one whatever this says."""
    dominant: Words
    """The input that moves the margin most within its tolerance: a field, as in ``tolerances``."""
    swing: Numbers
    """How far that input alone moves the margin, from end to end."""
    proven: Flags
    """Whether ``stays`` (1 or 0) holds for every set of inputs within the tolerances, so that nothing was drawn."""
    unanswered: Numbers
    """Share of draws without an answer (p2 not below p1, fittings that take the whole drop, an opening off the
    valve's table); they count as failing."""


@dataclass(frozen=True, eq=False)
class Remedy:
    """One way to cure an item, tried on all its cases by the same core."""

    kind: str
    """``staged trim``, ``plate downstream``, ``plates in series``, ``back-pressure``, ``lower location``,
    ``lower temperature``, ``higher recovery factor``, ``split``, ``larger valve``, ``flashing`` (advice only)."""
    text: str
    """The whole in one sentence, with its number, in metric units (``in_units`` for others)."""
    figures: Mapping[str, tuple[float, str]]
    """What must be done, and what comes of it: name -> (value in SI, kind of quantity as ``units.dimension``
    knows it)."""
    cures: bool
    """Does every case pass with it? Only a verified remedy does; False with a reason in ``cautions``."""
    margin: float
    """Least margin over the item's cases with the remedy; NaN where it has none."""
    verdicts: tuple[str | None, ...]
    """Regime of each of the item's cases with the remedy, in the item's order."""
    cautions: tuple[str, ...] = ()
    cases: Cases | None = None
    """The item's cases (and those of what is added to it) with the remedy applied, ready to be surveyed again;
    None for advice."""
    brief: str = ""
    """What must be done, in a few words, without what comes of it; empty where ``text`` is as short."""
    templates: tuple[str, ...] = ()
    """``text``, ``brief`` and ``cautions`` as templates of :mod:`lowpoint.survey.worded`; empty: as they stand."""

    @property
    def title(self) -> str:
        """The kind as a heading has it: another valve is named by what it must have."""
        if self.kind == "higher recovery factor" and self.figures and "FL at least" not in self.figures:
            return "valve with a lower limit"
        return self.kind

    def in_units(self, system: str) -> Remedy:
        """The same with its sentences in a set of units."""
        if not self.templates:
            return self
        text, brief, *cautions = (said(template, system) for template in self.templates)
        return replace(self, text=text, brief=brief, cautions=tuple(cautions))


@dataclass(frozen=True)
class Step:
    """One line of a working, which a checker can redo by hand."""

    symbol: str
    meaning: str
    equation: str
    """In symbols: ``(p1 - pv)/(p1 - p2)``; empty for an input, and for what is found by search or by a library."""
    numbers: str
    """The same with the printed numbers: ``(6.813 - 0.02339)/(6.813 - 5.213)``, plain arithmetic in the grammar of
    :mod:`lowpoint.survey.workings.arithmetic`; empty where ``equation`` is."""
    value: str
    """As printed; ``yes`` or ``no`` of a comparison; a word of a verdict."""
    unit: str
    source: str
    """Of the equation: a key of :data:`lowpoint.sources.SOURCES`. Of an input: where it stands or came from."""
    note: str = ""
    also: str = ""
    """The same quantity in US units, where these were asked for: ``23.2 psi``."""


@dataclass(frozen=True)
class Working:
    """The whole working of one case, in sections. Units are those of the standard: bar, m3/h, mm, Kv."""

    title: str
    sections: tuple[tuple[str, tuple[Step, ...]], ...]
    verdict: str
    cautions: tuple[str, ...] = ()
    errors: tuple[str, ...] = ()
    """Why the case has no verdict; the sections then hold what could be worked out."""
    citations: tuple[tuple[str, str], ...] = ()
    """Each source that a step names, with its full citation."""
    figures: int = 7
    """Significant figures of every number."""
    results: Mapping[str, float] = field(default_factory=dict)
    """What the working comes to, in SI, by the field of :class:`~lowpoint.survey.model.Findings`."""

    def steps(self) -> tuple[Step, ...]:
        """All steps in order."""
        return tuple(step for _, steps in self.sections for step in steps)


@dataclass(frozen=True)
class Line:
    """One line of a picture; in the picture's units."""

    name: str
    x: tuple[float, ...]
    y: tuple[float, ...]
    style: str = "line"
    """``line``, ``dashed``, ``dotted``, ``points``: told apart without colour."""
    labels: tuple[str, ...] = ()
    """Of the points, where they have names (the cases)."""
    marker: str = ""
    """On each point: ``circle``, ``triangle``, ``diamond``, ``square``, ``cross``, ``plus``; empty for none."""


@dataclass(frozen=True)
class Picture:
    """A chart, ready to be drawn by any face."""

    title: str
    x_title: str
    y_title: str
    lines: tuple[Line, ...]
    x_ticks: tuple[tuple[float, str], ...] = field(default=())
    """Places with names, where the abscissa has no scale (inlet, throat, outlet)."""
    alternative: str = ""
    """What the picture shows, in a sentence, for whoever cannot see it."""
