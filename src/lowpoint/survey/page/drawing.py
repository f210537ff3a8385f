"""A picture as SVG: axes with round numbers, lines told apart by dashes and markers, labels that keep apart, a legend.

Colours come from the page's style by class (``s1``, ``s2``, ...), so that they follow a light or a dark page; without
any style the drawing is black on nothing and says the same.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from html import escape
from itertools import pairwise

from lowpoint.survey.outcome import Line, Picture
from lowpoint.survey.page.numbers import figure
from lowpoint.survey.page.placing import Box, Frame, place_label, text_width
from lowpoint.survey.page.ticks import axis

__all__ = ["svg"]

WIDTH, HEIGHT = 470, 320
"""Of the plot with its axes; the legend comes below."""
LEFT, RIGHT, TOP, BOTTOM = 62, 18, 14, 52
SIZE, ROW = 13, 22
"""Of the letters, and a legend's line."""
DASHES = {"line": "", "dashed": "9 5", "dotted": "2 4"}
FEW = 12
"""A line of more points is marked at so many of them only."""
_SHAPES = {
    "circle": '<circle cx="{x}" cy="{y}" r="4"/>',
    "square": '<path d="M{x} {y}m-3.6 -3.6h7.2v7.2h-7.2z"/>',
    "triangle": '<path d="M{x} {y}m0 -4.8l4.6 8h-9.2z"/>',
    "diamond": '<path d="M{x} {y}m0 -5l5 5l-5 5l-5 -5z"/>',
    "plus": '<path class="open" d="M{x} {y}m-4.5 0h9m-4.5 -4.5v9"/>',
    "cross": '<path class="open" d="M{x} {y}m-3.6 -3.6l7.2 7.2m0 -7.2l-7.2 7.2"/>',
}


def svg(picture: Picture, name: str) -> str:
    """The drawing, ready to stand in a page; ``name`` is the beginning of its ids. Texts are escaped."""
    lines = [line for line in picture.lines if any(True for _ in _points(line))]
    frame = _frame(picture, lines)
    legend = list(_legend(lines))
    height = HEIGHT + ROW * (1 + max((row for row, *_ in legend), default=-1)) + 4
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" class="picture" viewBox="0 0 {WIDTH} {height}" role="img" '
        f'aria-labelledby="{name}-title {name}-desc" font-size="{SIZE}">',
        f'<title id="{name}-title">{_text(picture.title)}</title>',
        f'<desc id="{name}-desc">{_text(picture.alternative or picture.title)}</desc>',
        *_axes(picture, frame),
        *(_drawn(line, number, frame) for number, line in enumerate(lines)),
        *_labels(lines, frame),
        *(_entry(lines[number], number, x, HEIGHT + ROW * row + 10) for row, x, number in legend),
        "</svg>",
    ]
    return "".join(parts)


def _text(text: str) -> str:
    return escape(text, quote=True)


def _points(line: Line) -> Iterator[tuple[float, float]]:
    return ((x, y) for x, y in zip(line.x, line.y, strict=True) if math.isfinite(x) and math.isfinite(y))


def _frame(picture: Picture, lines: Sequence[Line]) -> Frame:
    points = [point for line in lines for point in _points(line)]
    y_ticks = axis([y for _, y in points])
    if picture.x_ticks:
        places = [x for x, _ in picture.x_ticks]
        room = 0.06 * (max(places) - min(places)) or 0.5
        x_low, x_high, x_ticks = min(places) - room, max(places) + room, picture.x_ticks
    else:
        numbers = axis([x for x, _ in points])
        x_low, x_high, x_ticks = numbers[0], numbers[-1], tuple((x, figure(x)) for x in numbers)
    return Frame(x_low, x_high, y_ticks[0], y_ticks[-1], x_ticks, y_ticks,
                 Box(LEFT, TOP, WIDTH - RIGHT, HEIGHT - BOTTOM))  # fmt: skip


def _axes(picture: Picture, frame: Frame) -> Iterator[str]:
    box = frame.box
    yield '<g class="grid" stroke="currentColor" stroke-opacity="0.22">'
    for y in frame.y_ticks:
        yield f'<path d="M{box.left} {frame.down(y):.1f}H{box.right}"/>'
    yield "</g>"
    yield f'<path fill="none" stroke="currentColor" d="M{box.left} {box.top}V{box.bottom}H{box.right}"/>'
    yield '<g class="ticks" fill="currentColor" text-anchor="end">'
    for y in frame.y_ticks:
        yield f'<text x="{box.left - 7}" y="{frame.down(y) + 4:.1f}">{_text(figure(y))}</text>'
    yield '</g><g class="ticks" fill="currentColor" text-anchor="middle">'
    yield from _below(frame)
    yield "</g>"
    middle = (box.top + box.bottom) / 2.0
    yield f'<text class="name" fill="currentColor" text-anchor="middle" transform="translate(15 {middle:.0f}) ' \
          f'rotate(-90)">{_text(picture.y_title)}</text>'  # fmt: skip
    if picture.x_title:
        yield f'<text class="name" fill="currentColor" text-anchor="middle" x="{(box.left + box.right) / 2:.0f}" ' \
              f'y="{HEIGHT - 12}">{_text(picture.x_title)}</text>'  # fmt: skip


def _below(frame: Frame) -> Iterator[str]:
    """The names of the abscissa; in two rows where they would run into each other."""
    ticks = sorted(frame.x_ticks)
    ends = [-math.inf, -math.inf]
    for x, words in ticks:
        across, half = frame.across(x), 0.5 * text_width(words, SIZE)
        row = 0 if across - half > ends[0] + 4 else 1
        if across - half <= ends[row] + 4:
            continue  # no room for this name in either row
        ends[row] = across + half
        yield f'<path stroke="currentColor" d="M{across:.1f} {frame.box.bottom}v5"/>'
        yield f'<text x="{across:.1f}" y="{frame.box.bottom + 18 + 15 * row}">{_text(words)}</text>'


def _look(line: Line, number: int) -> tuple[str, str]:
    """Class of the colour, and the marker: none where the line has none, but points are always seen."""
    known = line.marker if line.marker in _SHAPES else ""
    return f"s{number % 6 + 1}", known or ("circle" if line.style == "points" or len(line.x) == 1 else "")


def _drawn(line: Line, number: int, frame: Frame) -> str:
    colour, marker = _look(line, number)
    points = [(frame.across(x), frame.down(y)) for x, y in _points(line)]
    drawn = [f'<g class="{colour}" stroke="currentColor" fill="currentColor">']
    if line.style != "points" and len(points) > 1:
        way = "L".join(f"{x:.1f} {y:.1f}" for x, y in points)
        drawn.append(f'<path fill="none" stroke-width="2"{_dash(line)} d="M{way}"/>')
    step = max(1, len(points) // FEW) if line.style != "points" else 1
    drawn += [_shape(marker, x, y) for x, y in points[::step]]
    return "".join([*drawn, "</g>"])


def _shape(marker: str, x: float, y: float) -> str:
    return _SHAPES[marker].format(x=f"{x:.1f}", y=f"{y:.1f}") if marker else ""


def _dash(line: Line) -> str:
    dash = DASHES.get(line.style, "")
    return f' stroke-dasharray="{dash}"' if dash else ""


def _labels(lines: Sequence[Line], frame: Frame) -> Iterator[str]:
    """Names of points, each beside its own, off the others and off all points as far as there is room."""
    taken = [box for line in lines for box in _covered(line, frame)]
    for number, line in enumerate(lines):
        for (x, y), words in zip(list(_points(line)), line.labels, strict=False):
            if words:
                short = words if len(words) <= 24 else words[:23] + "…"
                box = place_label(frame.across(x), frame.down(y), short, SIZE, taken, frame.box)
                taken.append(box)
                yield f'<text class="label {_look(line, number)[0]}" fill="currentColor" x="{box.left:.1f}" ' \
                      f'y="{box.bottom - 3:.1f}">{_text(short)}</text>'  # fmt: skip


def _covered(line: Line, frame: Frame) -> Iterator[Box]:
    """What a line and its markers cover, in small boxes."""
    points = [(frame.across(x), frame.down(y)) for x, y in _points(line)]
    yield from (Box(x - 5, y - 5, x + 5, y + 5) for x, y in points)
    if line.style != "points":
        for (x, y), (x_next, y_next) in pairwise(points):
            steps = int(math.hypot(x_next - x, y_next - y) // 6) + 1
            for n in range(steps):
                across, down = x + (x_next - x) * n / steps, y + (y_next - y) * n / steps
                yield Box(across - 3, down - 2, across + 3, down + 2)


def _legend(lines: Sequence[Line]) -> Iterator[tuple[int, float, int]]:
    """Row, place and number of each line of the legend."""
    row, x = 0, float(LEFT)
    for number, line in enumerate(lines):
        width = 44 + text_width(line.name, SIZE) + 18
        if x > LEFT and x + width > WIDTH:
            row, x = row + 1, float(LEFT)
        yield row, x, number
        x += width


def _entry(line: Line, number: int, x: float, y: float) -> str:
    colour, marker = _look(line, number)
    stroke = f'<path fill="none" stroke-width="2"{_dash(line)} d="M{x:.1f} {y}h36"/>' if line.style != "points" else ""
    sign = _shape(marker, x + 18, y)
    return (f'<g class="{colour}" stroke="currentColor" fill="currentColor">{stroke}{sign}</g>'
            f'<text fill="currentColor" x="{x + 44:.1f}" y="{y + 4}">{_text(line.name)}</text>')  # fmt: skip
