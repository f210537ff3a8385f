"""What would explain the claims of a sheet that differ: each suspect once, with all that would follow from it.

A claim names its suspects by the letters that they have here. Nothing of it is a fact: only the vendor can tell.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from string import ascii_uppercase

from lowpoint.audit.model import Claim, Suspect

__all__ = ["NOT_TRIED", "Explanation", "explanations", "follows_text", "letters_of", "phrase_of", "unexplained"]

NOT_TRIED = "the usual mistakes were not tried on it"


@dataclass(frozen=True)
class Explanation:
    """A mistake, or two, with the claims that would follow from it."""

    letter: str
    phrase: str
    """``p1 was read as gauge and used as absolute``."""
    explains: tuple[tuple[str, str | None], ...]
    """Claims (quantity, case)."""
    numbers: tuple[str, ...]
    """What each of them would be."""
    equal: bool
    """Does it explain the same claims as well as the one before it, so that numbers cannot tell them apart?"""
    unlisted: int
    """Behind the last of equal ones: how many more explain as well and are named nowhere."""


def phrase_of(suspect: Suspect) -> str:
    """What was done, if it was."""
    return suspect.text.partition(" follows if ")[2]


def explanations(claims: Iterable[Claim]) -> tuple[Explanation, ...]:
    """The suspects of all claims, each once: those that are the first of a claim before the others, and of these the
    most explaining first; equal ones one behind the other."""
    groups: dict[tuple[object, ...], dict[str, Suspect]] = {}
    places: dict[tuple[object, ...], int] = {}
    for claim in claims:
        for place, suspect in enumerate(claim.suspects):
            alone = "" if suspect.equal else phrase_of(suspect)
            group: tuple[object, ...] = (frozenset(suspect.explains), len(suspect.mistakes), suspect.equal, alone)
            groups.setdefault(group, {}).setdefault(phrase_of(suspect), suspect)
            places[group] = min(place, places.get(group, place))
    ranked = sorted(groups, key=lambda group: (places[group] > 0, -len(next(iter(groups[group].values())).explains)))
    found: list[Explanation] = []
    for group in ranked:
        members = list(groups[group].items())
        for number, (phrase, suspect) in enumerate(members, 1):
            unlisted = max(0, suspect.equal + 1 - len(members)) if number == len(members) else 0
            found.append(Explanation(_letter(len(found)), phrase, suspect.explains, suspect.numbers, number > 1,
                                     unlisted))  # fmt: skip
    return tuple(found)


def _letter(place: int) -> str:
    """A to Z, then A2 and on."""
    again, letter = divmod(place, len(ascii_uppercase))
    return ascii_uppercase[letter] + (str(again + 1) if again else "")


def letters_of(claim: Claim, explained: Sequence[Explanation]) -> list[tuple[str, Suspect]]:
    """The suspects of a claim, likeliest first, with their letters."""
    letters = {one.phrase: one.letter for one in explained}
    return [(letters[phrase_of(suspect)], suspect) for suspect in claim.suspects]


def follows_text(one: Explanation) -> str:
    """The numbers that would follow: ``sigma: Min. 2.614, Norm. 1.903; dp_choked: Min. 5.47``."""
    quantities: dict[str, list[str]] = {}
    for (quantity, case), number in zip(one.explains, one.numbers, strict=True):
        quantities.setdefault(quantity, []).append(f"{case} {number}" if case else number)
    return "; ".join(f"{quantity}: {', '.join(numbers)}" for quantity, numbers in quantities.items())


def unexplained(claims: Iterable[Claim]) -> tuple[int, tuple[str, ...]]:
    """How many claims that differ none of the usual mistakes gives, and the quantities on which they are not tried."""
    bare = [claim for claim in claims if claim.verdict == "differs" and not claim.suspects]
    untried = [claim for claim in bare if not claim.tried]
    return len(bare) - len(untried), tuple(dict.fromkeys(claim.quantity for claim in untried))
