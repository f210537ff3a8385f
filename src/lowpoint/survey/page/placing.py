"""Where things stand in a drawing: the scales, and labels that keep apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

__all__ = ["Box", "Frame", "place_label", "text_width"]

_NARROW, _WIDE = set("iljtfrI.,;:'|!()[] "), set("mwMWGOQ@%—")


@dataclass(frozen=True)
class Box:
    """A rectangle; y grows downward."""

    left: float
    top: float
    right: float
    bottom: float

    def shared(self, other: Box) -> float:
        """The area that both cover."""
        wide = min(self.right, other.right) - max(self.left, other.left)
        high = min(self.bottom, other.bottom) - max(self.top, other.top)
        return wide * high if wide > 0.0 and high > 0.0 else 0.0


@dataclass(frozen=True)
class Frame:
    """The field of a plot with its two scales."""

    x_low: float
    x_high: float
    y_low: float
    y_high: float
    x_ticks: tuple[tuple[float, str], ...]
    y_ticks: tuple[float, ...]
    box: Box

    def across(self, x: float) -> float:
        return self.box.left + (x - self.x_low) / (self.x_high - self.x_low) * (self.box.right - self.box.left)

    def down(self, y: float) -> float:
        return self.box.bottom - (y - self.y_low) / (self.y_high - self.y_low) * (self.box.bottom - self.box.top)


def text_width(text: str, size: float) -> float:
    """About how wide a text is, in a usual sans-serif letter; rather too wide than too narrow."""
    return size * sum(0.34 if c in _NARROW else 0.9 if c in _WIDE else 1.05 if ord(c) > 0x2E80 else 0.6 for c in text)


def place_label(x: float, y: float, text: str, size: float, taken: Sequence[Box], field: Box) -> Box:
    """The place beside a point where a text covers least of what is taken and of the world outside the field."""
    wide, high = text_width(text, size), size + 4.0

    places = _places(x, y, wide, high)
    reach = Box(min(p.left for p in places), min(p.top for p in places), max(p.right for p in places),
                max(p.bottom for p in places))  # fmt: skip
    near = [box for box in taken if reach.shared(box)]

    def cost(box: Box) -> float:
        inside = Box(max(box.left, field.left), max(box.top, field.top), min(box.right, field.right),
                     min(box.bottom, field.bottom))  # fmt: skip
        outside = wide * high - box.shared(inside)
        return sum(box.shared(other) for other in near) + 2.0 * outside

    return min(places, key=cost)  # the first of equals: where readers look first


def _places(x: float, y: float, wide: float, high: float) -> list[Box]:
    """Right, left, above, below and the corners, near the point and then farther off."""
    places = []
    for gap in (8.0, 16.0, 28.0):
        rights, lefts, middles = x + gap, x - gap - wide, x - wide / 2.0
        ups, downs, level = y - gap - high, y + gap, y - high / 2.0
        places += [(rights, level), (rights, ups), (middles, ups), (middles, downs), (lefts, level), (lefts, ups),
                   (rights, downs), (lefts, downs)]  # fmt: skip
    return [Box(left, top, left + wide, top + high) for left, top in places]
