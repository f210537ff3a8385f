"""Which quantity a label names, how surely, and in which unit; more than one, or none, where that is so."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache, lru_cache

from lowpoint.audit.terms import OTHERS, TERMS, UNCLEAR
from lowpoint.audit.unitsigns import PLAIN, Sign, unit_sign
from lowpoint.audit.vocabulary import BY_KEY, UNITS, fits
from lowpoint.audit.words import CASE_WORDS, FILLERS, FOREIGN, Words, folded

__all__ = ["FORM_WORDS", "Label", "read_form", "read_label"]

LONGEST = 90
"""Longer texts are sentences."""
LEAST = 0.62
"""Lowest score of a label that is taken for a quantity."""
NEAR = 0.1
"""Two quantities nearer than this cannot be told apart."""
_AT_TRAVEL = frozenset({"travel", "opening", "lift", "rated", "operating", "flow"})
LENGTHS = frozenset({"mm", "cm", "in", "ft", "bar", "psi", "kPa", "MPa"})
"""Units that are written behind a label and hardly mean anything else."""
OTHER, UNSURE = "-", "?"
_ELSEWHERE = frozenset(
    (key, word)
    for word, keys in (("outlet", "t pv density viscosity kinematic sound_speed"), ("vapour", "density viscosity flow"))
    for key in keys.split()
)
"""Words that make a quantity that of another place or phase, which the method does not know."""
_INCHES = re.compile(r"(?P<name>.+[^\s,])[\s,]+in\.", re.IGNORECASE)
_BRACKET = re.compile(r"[\[(]([^\[\]()]*(?:\([^()]*\)[^\[\]()]*)?)[\])]")
_FORMULA = re.compile(r"p_?[12₁₂]\s*[-–−]\s*p_?[v2ᵥ₂].*/|/.*p_?[12₁₂]\s*[-–−]\s*p_?[v2ᵥ₂]", re.IGNORECASE)
_TAG = re.compile(r"[A-Za-z]{1,5}-\d[\w/-]*|\d*[A-Za-z]{1,5}[-_ ]?\d{2,}[A-Z]?(?<!(?i:kv)100)", re.ASCII)
"""What is a tag rather than a symbol."""
_UNITLIKE = frozenset({"kv", "cv", "kvs", "cvs", "sg", "s.g.", "dn", "nps", "% open", "% travel", "(kv)", "(cv)"})
"""Texts that may be a unit and may be a label."""
FORM_WORDS = re.compile(r"[\[(,;]?\s*\b(?:(?:up|down)stream|xf) (?:form|definition)\b\s*[\])]?", re.IGNORECASE)
_EQUATION = re.compile(r"[\s=:,]*[(\[]*(?:p_?[12₁₂]\s*[-–−]|[Δ∆δ]\s*p\s*/|dp\s*/)", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Label:
    """A label understood. ``key`` of a quantity, ``-`` what is of no concern, ``?`` unclear, empty: not known."""

    text: str
    key: str
    score: float
    unit: Sign | None = None
    gauge: bool | None = None
    cases: tuple[str, ...] = ()
    form: str | None = None
    choices: tuple[str, ...] = ()
    """What an unclear one may be: in words, then the remedy."""
    words: frozenset[str] = frozenset()
    inherent: str = ""
    """The unit that the quantity's own name says."""

    @property
    def known(self) -> bool:
        return bool(self.key) and self.key not in (OTHER, UNSURE)


@dataclass(frozen=True, slots=True)
class _Pattern:
    key: str
    words: frozenset[str]
    choices: tuple[str, ...] = ()


@cache
def _patterns() -> tuple[tuple[_Pattern, ...], dict[str, frozenset[str]], frozenset[str]]:
    """All patterns, each key's own symbols, and every word that carries meaning."""
    found: list[_Pattern] = []
    symbols: dict[str, set[str]] = {}
    for term in TERMS:
        found += [_Pattern(term.key, folded(label).tokens) for label in term.labels]
        own = {f"@{symbol if len(symbol) == 1 else symbol.lower()}" for symbol in term.symbols}
        found += [_Pattern(term.key, frozenset({symbol})) for symbol in own if symbol not in ("@dn", "@nps")]
        symbols[term.key] = own | {f"@{word}" for word, _ in term.inherent}
    found += [_Pattern(UNSURE, folded(label).tokens, choices) for label, choices in UNCLEAR.items()]
    found += [_Pattern(OTHER, folded(label).tokens) for label in OTHERS]
    meant = frozenset(word for pattern in found for word in pattern.words)
    return tuple(found), {key: frozenset(own) for key, own in symbols.items()}, meant


@cache
def _by_word() -> dict[str, tuple[int, ...]]:
    found: dict[str, list[int]] = {}
    for place, pattern in enumerate(_patterns()[0]):
        for word in pattern.words:
            found.setdefault(word, []).append(place)
    return {word: tuple(places) for word, places in found.items()}


def _penalty(word: str, key: str, symbols: dict[str, frozenset[str]], meant: frozenset[str]) -> float:
    """What a word that is left over takes from the score."""
    if word in symbols.get(key, ()):
        return 0.0
    if word in ("@t1", "@T") and key in ("pv", "density", "viscosity", "kinematic", "sound_speed"):
        return 0.02  # vapour pressure at T1
    if word == "@d" and key in ("bore", "bores"):
        return 0.03
    if word.startswith("@"):
        return 0.45
    if word in FOREIGN or (key, word) in _ELSEWHERE:
        return 0.5
    if word in FILLERS:
        return 0.02
    if word in CASE_WORDS:
        return 0.4 if key == "statement" else 0.06
    if word in _AT_TRAVEL and key in ("fl", "xfz", "fd", "coefficient", "rated"):
        return 0.05  # FL at operating travel
    if word in meant:
        return 0.27
    return 0.08 if word.isdigit() or len(word) == 1 else 0.15


@lru_cache(8192)
def _scored(
    tokens: frozenset[str], context: frozenset[str] = frozenset(), aside: frozenset[str] = frozenset()
) -> tuple[tuple[float, int, str, tuple[str, ...]], ...]:
    """Score, words matched, key and choices of every pattern that a set of words holds, best first; one a key.

    Words of a heading (``context``) may be used and cost nothing where they are not; words behind ``at`` (``aside``)
    cost little, and name nothing by themselves.
    """
    patterns, symbols, meant = _patterns()
    index = _by_word()
    best: dict[str, tuple[float, int, str, tuple[str, ...]]] = {}
    together = tokens | context
    for place in {place for word in tokens for place in index.get(word, ())}:
        pattern = patterns[place]
        if not pattern.words <= together or pattern.words <= aside:
            continue
        left = tokens - pattern.words
        score = 1.0 - sum(
            0.04
            if word in aside and not (pattern.key == "statement" and word in CASE_WORDS)
            else _penalty(word, pattern.key, symbols, meant)
            for word in left
        )
        agreed = len(pattern.words) + sum(word in symbols.get(pattern.key, ()) for word in left)
        entry = (round(max(score, 0.0), 4), agreed, pattern.key, pattern.choices)
        if pattern.key not in best or entry[:2] > best[pattern.key][:2]:
            best[pattern.key] = entry
    return tuple(sorted(best.values(), key=lambda e: (-e[0], -e[1])))


def _ways(text: str) -> list[tuple[str, Sign | None]]:
    """The ways to part a label into name and unit, best first."""
    if _FORMULA.search(text):
        return [(_EQUATION.split(text)[0], None)]
    found: list[tuple[str, Sign | None]] = []
    for match in reversed(list(_BRACKET.finditer(text))):
        inside = match[1].strip()
        sign = unit_sign(inside)
        name = f"{text[: match.start()]} {text[match.end() :]}".strip()
        if name and (sign or inside in PLAIN):
            found.append((name, sign))
    for mark in (",", ";", "\n", " - ", ":", " in ", "/", " – "):
        name, sign_, unit = text.rpartition(mark)
        sign = unit_sign(unit.strip()) if sign_ and name.strip() and unit.strip() else None
        if sign:
            found.append((name, sign))
    words = text.split()
    for place in range(max(1, len(words) - 3), len(words)):
        sign = unit_sign(" ".join(words[place:]))
        if sign:
            found.append((" ".join(words[:place]), sign))
    if words[-1].lower() == "in":  # the inlet, more often than the inch
        found.insert(0, (text, None))
    found.append((text, None))
    return found


@lru_cache(8192)
def read_label(text: str, context: frozenset[str] = frozenset()) -> Label:
    """What a text names; ``context`` are words of the heading above, which speak where the label alone is unclear."""
    text = " ".join(text.split())
    if not text or len(text) > LONGEST or not any(c.isalpha() or c in "σΔ∆ρηνμ%" for c in text):
        return Label(text, "", 0.0)
    if _TAG.fullmatch(text) or _is_unit(text):
        return Label(text, "", 0.0)
    cut = FORM_WORDS.sub(" ", text).strip(" :.=,;")
    inches = _INCHES.fullmatch(text.strip(" :"))
    best = Label(text, "", 0.0)
    if inches:
        best = _judged(text, inches["name"], unit_sign("in"), context)
        if best.known and best.unit and _fitting(best.key, best.unit):
            return best
        best = Label(text, "", 0.0)
    ways = _ways(cut or text)
    unfit: set[str] = set()
    for name, sign in ways:
        found = _judged(text, name, sign, context)
        if found.known and sign and not _fitting(found.key, sign):
            if sign.label in LENGTHS:
                unfit.add(found.key)  # a stroke in mm is no opening
            continue
        if sign is None and found.key in unfit:
            continue
        if found.score > best.score + (0.0 if best.unit is None else 0.05):
            best = found
    return best


def _is_unit(text: str) -> bool:
    if len(text) < 2 or text.lower() in _UNITLIKE:
        return False
    sign = unit_sign(text)
    return sign is not None and (sign.level or sign.meaning.dimension in UNITS)


def _fitting(key: str, sign: Sign) -> bool:
    """Can a quantity be in this unit? A coefficient may be written with the flow it stands for."""
    kind = BY_KEY[key].kind
    if sign.level or kind == "level":
        return sign.level and kind == "level"
    return fits(kind, sign.meaning) or (kind == "coefficient" and sign.meaning.dimension == "m3 s-1")


def _judged(text: str, name: str, sign: Sign | None, context: frozenset[str]) -> Label:
    words = folded(name)
    tokens = words.tokens
    aside = _aside(name, tokens)
    scored = _scored(tokens, aside=aside)
    if context and (not scored or scored[0][0] < LEAST or scored[0][2] in (UNSURE, "statement")):
        wider = [e for e in _scored(tokens, context, aside) if e[2] not in (UNSURE, OTHER, "statement")]
        if wider and wider[0][0] - 0.1 >= LEAST:
            scored = tuple((round(score - 0.1, 4), *rest) for score, *rest in wider)  # type: ignore[misc]
    if not scored or scored[0][0] < LEAST:
        several = _of_symbols(tokens)
        if len(several) > 1 and not context:
            said = " or ".join(BY_KEY[key].meaning for key in several)
            return Label(
                text, UNSURE, LEAST, sign, words.gauge, words.cases, None, (said, "give each by itself"), tokens
            )
        return Label(text, "", scored[0][0] if scored else 0.0, sign, words.gauge, words.cases, words=tokens)
    key, choices = scored[0][2], scored[0][3]
    rivals = [e for e in scored[1:] if scored[0][0] - e[0] < NEAR and e[2] != key and e[1] >= scored[0][1]]
    if key not in (OTHER, UNSURE) and [r for r in rivals if r[2] not in (OTHER,)]:
        names = (key, *(r[2] for r in rivals if r[2] not in (OTHER, UNSURE)))
        if len(set(names)) > 1:
            choices = (" or ".join(BY_KEY[n].meaning for n in dict.fromkeys(names)), "say which")
            key = UNSURE
    form = read_form(text) if key.startswith("sigma") else None
    return Label(text, key, scored[0][0], sign, words.gauge, words.cases, form, choices, tokens,
                 _inherent(key, words))  # fmt: skip


def _of_symbols(tokens: frozenset[str]) -> list[str]:
    """The quantities whose symbols stand in one label (``FL / FLP``, ``P1/P2``)."""
    symbols = _patterns()[1]
    return [term.key for term in TERMS if any(f"@{s.lower() if len(s) > 1 else s}" in tokens for s in term.symbols)
            and symbols[term.key]]  # fmt: skip


def _aside(name: str, tokens: frozenset[str]) -> frozenset[str]:
    """Words that stand behind ``at``: they say where or when, not what."""
    parts = re.split(r"\s(?:at|@|bei|for)\s|\s?@\s?", name, maxsplit=1)
    if len(parts) < 2 or not parts[0].strip():
        return frozenset()
    return tokens & (folded(parts[1]).tokens - folded(parts[0]).tokens)


def _inherent(key: str, words: Words) -> str:
    if key in BY_KEY:
        for word, unit in BY_KEY[key].inherent:
            if word in words.tokens or f"@{word}" in words.tokens:
                return unit
    if key == UNSURE:
        for word, unit in (("@kv", "Kv"), ("@cv", "Cv"), ("@dn", "DN"), ("@nps", "NPS")):
            if word in words.tokens:
                return unit
    return ""


@lru_cache(4096)
def read_form(text: str) -> str | None:
    """The form of an index that its label states by its equation or in words."""
    if not re.search(r"[-–−]|form|xf|definition", text, re.IGNORECASE):
        return None
    low = re.sub(r"[\s_]", "", text.lower())
    low = (
        low.replace("₁", "1").replace("₂", "2").replace("ᵥ", "v").replace("∆", "Δ").replace("δ", "Δ").replace("−", "-")
    )
    low = low.replace("–", "-")
    if re.search(r"p2-pv", low):
        return "downstream"
    if re.search(r"/\(?p1-pv", low) or re.search(r"\bxf\b", text.lower()):
        return "xf"
    if re.search(r"p1-pv", low):
        return "upstream"
    if re.search(r"\bdownstream\b.*form|\bform\b.*downstream|downstream (?:index|sigma|definition)", text.lower()):
        return "downstream"
    if re.search(r"\bupstream\b.*form|\bform\b.*upstream|upstream (?:index|sigma|definition)", text.lower()):
        return "upstream"
    return None
