"""Values in words: state of the flow (``no cavitation``, ``choked``), flow direction, characteristic, trim class."""

from __future__ import annotations

import re

__all__ = ["canonical", "is_answer", "keeps_to", "statement_of"]

_NO = re.compile(
    r"\b(?:no|not|non|none|nil|without|free|keine?|nein|sans|sin|absent|never|unlikely)\b"
    r"|\b(?:un|non)-?(?=chok|cavit|flash|turb)",
    re.IGNORECASE,
)
_YES = re.compile(r"yes|ja|oui|si|sí|true|y|x|present|occurs|expected|wahr", re.IGNORECASE)
_NEVER = re.compile(
    r"no|n|nein|non|false|falsch|none|nil|not expected|absent|free|not present|does not occur", re.IGNORECASE
)
_WORDS = (
    ("incipient", "incipient cavitation"), ("cavit", "cavitating"), ("kavit", "cavitating"), ("flash", "flashing"),
    ("subcritical", "not choked"), ("sub-critical", "not choked"), ("chok", "choked"), ("critical flow", "choked"),
    ("laminar", "not turbulent"), ("transitional", "not turbulent"), ("turbulent", "turbulent"),
)  # fmt: skip
_OPPOSITE = {
    "cavitating": "no cavitation", "flashing": "no flashing", "choked": "not choked", "turbulent": "not turbulent",
    "incipient cavitation": "no cavitation",
}  # fmt: skip
_FREE = re.compile(
    r"(?:no|without|free (?:of|from)|not|non|zero)[\s-]+(?:any |expected )?(?:cavitat\w*|flashing|choked?\w*)\b.*"
    r"|cavitation[\s-]free\b.*"
    r"|(?:\w+ ){0,5}(?:is|operates|runs|will be) (?:not |fully |partly )?(?:cavitating|flashing|choked|turbulent)\b.*"
    r"|(?:valve |flow |service )?(?:operates |is )?(?:without|free (?:of|from)) (?:cavitation|flashing)\b.*"
    r"|(?:cavitating|flashing|choked|turbulent|laminar|subcritical)(?: (?:flow|service|condition|regime))?"
    r"|(?:not choked|unchoked|non-choked)(?: flow)?",
    re.IGNORECASE,
)


def statement_of(text: str, subject: frozenset[str] | None = None) -> str | None:
    """The word of :data:`~lowpoint.audit.vocabulary.STATEMENTS` that a text means; None where it says none of them.

    ``subject`` are the words of its label (``Cavitation``: ``No``); without one the text must say all by itself.

    >>> statement_of("No", frozenset({"cavitation"})), statement_of("Not choked"), statement_of("Cavitation data")
    ('no cavitation', 'not choked', None)
    """
    said = " ".join(text.split()).strip(" .;:").lower()
    if not said or len(said) > 120:
        return None
    if subject is None:
        return _read(said) if _FREE.fullmatch(said) else None
    about = _about(subject)
    if about and _YES.fullmatch(said):
        return about
    if about and _NEVER.fullmatch(said):
        return _OPPOSITE[about]
    return _read(said)


def is_answer(text: str) -> bool:
    """Is a text a bare yes or no?"""
    said = text.strip(" .;:").lower()
    return bool(_YES.fullmatch(said) or _NEVER.fullmatch(said))


def keeps_to(text: str, subject: frozenset[str]) -> bool:
    """Does a statement keep to what its label asks of, where that is one thing?"""
    about, said = _about(subject), statement_of(text, subject)
    alike = {"cavitating": ("cavit",), "flashing": ("flash",), "choked": ("chok",)}
    return said is not None and (about is None or any(part in said for part in alike[about]))


def _about(subject: frozenset[str]) -> str | None:
    """What a yes or a no to a label with these words affirms or denies."""
    joined = " ".join(sorted(subject))
    if "cavitation" in joined:
        return "cavitating"
    if "flash" in joined:
        return "flashing"
    return "choked" if "choked" in joined or "critical" in joined else None


def _read(said: str) -> str | None:
    for part, word in _WORDS:
        place = said.find(part)
        if place < 0:
            continue
        behind = re.search(rf"{part}\w*[\s:-]+(?:is )?(?:free|none|no|nil|not|keine)\b", said)
        return _OPPOSITE.get(word, word) if _NO.search(said[: place + 1]) or behind else word
    return None


_CANONICAL: dict[str, tuple[tuple[str, str], ...]] = {
    "direction": (
        (r"\bfto\b|to[\s-]?open|under (?:the )?(?:plug|seat)|\bopen(?:s|ing)?\b|[oö]ffnend", "open"),
        (r"\bftc\b|to[\s-]?close|over (?:the )?(?:plug|seat)|\bclos(?:e|es|ing)\b|schlie(?:ss|ß)end", "close"),
        (r"between (?:the )?seats", "between seats"),
        (r"\binward|\bout(?:side)?[\s-]?(?:to[\s-]?)?in\b", "inward"),
        (r"\boutward|\bin(?:side)?[\s-]?(?:to[\s-]?)?out\b", "outward"),
        (r"\beither\b|\bbi-?directional\b|\bany\b", "either"),
    ),
    "characteristic": (
        (r"equal|eq\.? ?%|\beq\b|=\s?%|gleichprozentig|gl\.?\s?%|egal|isoporcentual|exponential", "equal percentage"),
        (r"lin", "linear"),
    ),
    "trim": (
        (r"^reduced\b|\breduced (?:trim|port|capacity)", "reduced"),
        (r"^full\b|\bfull (?:trim|port|size|capacity)", "full"),
    ),
}


def canonical(key: str, text: str) -> str:
    """The word that the functions use for a direction, a characteristic or a trim class; other texts as they stand."""
    found = [word for pattern, word in _CANONICAL.get(key, ()) if re.search(pattern, text, re.IGNORECASE)]
    return found[0] if len(found) == 1 else text
