"""The fuzzer's targets without the fuzzer: inputs that once broke something, and a fixed stream of made ones.

A seed lies in ``seeds/<target>/``; its name says what it broke.
"""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from fuzz.targets import TARGETS, sheet
from hostile.running import unstuck

SEEDS = Path(__file__).with_name("seeds")
FOUND = sorted(path for path in SEEDS.glob("*/*") if path.parent.name in TARGETS)
MADE = {"sheet": 400, "formula": 600, "mended": 150, "package": 200, "open_list": 100, "saved": 100, "book": 40,
        "text_list": 25, "raw_list": 25, "grid": 40}  # fmt: skip


@pytest.mark.parametrize("path", FOUND, ids=lambda path: f"{path.parent.name}-{path.name}")
def test_what_was_found_once_is_mended(path: Path) -> None:
    with unstuck(60):
        TARGETS[path.parent.name](path.read_bytes())


def test_there_are_seeds() -> None:
    assert len(FOUND) >= 8
    assert set(MADE) == set(TARGETS)


@pytest.mark.parametrize("name", MADE)
def test_made_inputs(name: str) -> None:
    chance = random.Random(name)
    seeds = [path.read_bytes() for path in FOUND if path.parent.name == name] or [b""]
    for _ in range(MADE[name]):
        data = bytearray(chance.choice(seeds))
        for _ in range(chance.randrange(1, 30)):
            place = chance.randrange(len(data) + 1)
            data[place:place] = bytes([chance.choice((chance.randrange(128), chance.randrange(128, 256)))])
        with unstuck(60):
            TARGETS[name](bytes(data[:2000]))


TYPED = """<row r="1"><c r="A1" t = "str"><f>A1+1</f><v>x</v></c></row>"""


@pytest.mark.parametrize(
    "text",
    [
        TYPED, """<row r='1'><c r='A1' t ='e'><f>A1+1</f><v>x</v></c></row>""",
        """<row r="1"><c r="A1"\nt="str"><f>A1+1</f><v>x</v></c></row>""",
        """<row r="1"><c r="A1" s="1" vm = "3"><f>A1+1</f><v>4</v></c></row>""",
        """<row r="1"><c r="A1" q=" t='str' vm='2'" t="b"><f>A1+1</f><v>1</v></c></row>""",
        """<row r="1"><c q=' r="B7" ' r="A1"><f>A1+1</f><v>4</v></c></row>""",
        """<row r="1"><c r="A1"><f>A1+1</f>\n<v xml:space="preserve">4</v >\n</c ></row>""",
        """<row r="1"><c r="A1"><f>1<!-- x --></f><v>4<?x y?></v></c></row>""",
    ],
)  # fmt: skip
def test_lawful_xml_in_an_unusual_hand(text: str) -> None:
    """Blanks around equals signs, single quotes, what looks like an attribute inside another (XML 1.0, 3.1)."""
    sheet(text.encode())
