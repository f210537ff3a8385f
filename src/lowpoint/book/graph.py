"""Which groups of formulas read which: edges, circles among them, and an order to work in."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from .refs import Area

__all__ = ["Block", "components", "dependencies"]

FEW = 64  # a reference that meets more blocks of one column than this is tied to the column as a whole


@dataclass(frozen=True, slots=True)
class Block:
    """A group's places on its sheet (all cells it fills), and every rectangle that it reads."""

    sheet: str
    areas: tuple[Area, ...]
    reads: tuple[tuple[str, Area], ...]


@dataclass(slots=True)
class _Column:
    """The blocks that fill cells of one column: small ones sorted by first row, large ones as they come."""

    small: list[tuple[int, int, int]] = field(default_factory=list)  # first row, last row, block
    large: list[tuple[int, int, int]] = field(default_factory=list)
    node: int = -1  # the node that stands for the whole column

    def meeting(self, r1: int, r2: int) -> list[int]:
        """The blocks that have a cell in these rows."""
        begin = bisect_left(self.small, (r1 - FEW,))
        end = bisect_right(self.small, (r2, 1 << 60))
        near = (b for first, last, b in self.small[begin:end] if last >= r1)
        return [*near, *(b for first, last, b in self.large if first <= r2 and last >= r1)]

    def count(self, r1: int, r2: int) -> int:
        """How many at most that may be."""
        return bisect_right(self.small, (r2, 1 << 60)) - bisect_left(self.small, (r1 - FEW,)) + len(self.large)


def dependencies(blocks: Sequence[Block]) -> list[set[int]]:
    """For each block the blocks it reads; the list goes on with nodes that stand for whole crowded columns.

    Blocks count as read when any of their rows lies in a range read: too many edges at times, never too few.
    """
    columns = _columns(blocks)
    edges: list[set[int]] = [set() for _ in blocks]
    for number, block in enumerate(blocks):
        for sheet, area in block.reads:
            for column in _between(columns.get(sheet, {}), area.c1, area.c2):
                edges[number].update(_meeting(column, area, edges))
    return edges


def _columns(blocks: Sequence[Block]) -> dict[str, dict[int, _Column]]:
    columns: dict[str, dict[int, _Column]] = defaultdict(lambda: defaultdict(_Column))
    for number, block in enumerate(blocks):
        for area in block.areas:
            for c in range(area.c1, area.c2 + 1):
                column = columns[block.sheet][c]
                (column.small if area.r2 - area.r1 < FEW else column.large).append((area.r1, area.r2, number))
    for sheet in columns.values():
        for column in sheet.values():
            column.small.sort()
    return columns


def _between(columns: dict[int, _Column], c1: int, c2: int) -> Iterable[_Column]:
    if c2 - c1 > len(columns):
        return [column for c, column in columns.items() if c1 <= c <= c2]
    return [columns[c] for c in range(c1, c2 + 1) if c in columns]


def _meeting(column: _Column, area: Area, edges: list[set[int]]) -> Iterable[int]:
    if column.count(area.r1, area.r2) <= FEW:
        return column.meeting(area.r1, area.r2)
    if column.node < 0:
        column.node = len(edges)
        edges.append({b for _, _, b in (*column.small, *column.large)})
    return [column.node]


def components(edges: Sequence[set[int]]) -> list[list[int]]:
    """The strongly connected nodes together, each set after all that it depends on.

    Source: R. E. Tarjan, Depth-first search and linear graph algorithms, SIAM J. Comput. 1 (1972), without recursion.
    """
    order = [-1] * len(edges)
    low = [0] * len(edges)
    on_stack = [False] * len(edges)
    stack: list[int] = []
    found: list[list[int]] = []
    counter = 0
    for root in range(len(edges)):
        if order[root] >= 0:
            continue
        work = [(root, iter(edges[root]))]
        order[root] = low[root] = counter
        counter += 1
        stack.append(root)
        on_stack[root] = True
        while work:
            node, rest = work[-1]
            for after in rest:
                if order[after] < 0:
                    order[after] = low[after] = counter
                    counter += 1
                    stack.append(after)
                    on_stack[after] = True
                    work.append((after, iter(edges[after])))
                    break
                if on_stack[after]:
                    low[node] = min(low[node], order[after])
            else:
                work.pop()
                if work:
                    low[work[-1][0]] = min(low[work[-1][0]], low[node])
                if low[node] == order[node]:
                    found.append(_popped(stack, on_stack, node))
    return found


def _popped(stack: list[int], on_stack: list[bool], node: int) -> list[int]:
    members = []
    while True:
        member = stack.pop()
        on_stack[member] = False
        members.append(member)
        if member == node:
            return members
