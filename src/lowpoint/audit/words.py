"""Labels as sets of folded words: spelling, abbreviation, language, symbol and case sign made equal.

A label is compared as a set: ``Liq. press. recovery factor F_L``, ``FL (pressure recovery)`` and ``Recovery factor``
fold to words of which those of one quantity are the largest part.
"""

from __future__ import annotations

import re
import unicodedata
from functools import lru_cache

from lowpoint.audit.terms import TERMS

__all__ = ["CASE_WORDS", "FILLERS", "FOREIGN", "Words", "folded", "plain"]

_EQUAL = {
    # One word of the trade for each that means the same; several words where a compound holds several.
    "inlet": "ahead upstream entry entrance before amont entrada eingang eintritt inl primary vor entree ups u/s",
    "outlet": "behind downstream exit after out aval salida ausgang austritt outl discharge sortie hinter d/s "
              "leaving secondary",
    "pressure": "press pres pression presion druck p",
    "vapour": "vapor vap vapeur dampf saturation saturated sat",
    "temperature": "temp temperatur temperatura tempe",
    "density": "dens dichte densite densidad",
    "viscosity": "visc viskositat viscosite viscosidad",
    "critical": "crit kritisch kritischer critique critico critica kritische",
    "flow": "flowing durchfluss debit caudal durchflussmenge flowrate durchsatz",
    "volume": "volumetric vol volumenstrom volumique",
    "mass": "massique masico",
    "drop": "differential difference diff differentielle diferencial loss",
    "limit": "limits limites grenzwert lim",
    "coefficient": "coefficients coeff coef koeffizient coeficiente beiwert",
    "required": "needed req reqd requ requis requerido erforderlich erforderlicher benotigt requires",
    "calculated": "calc calcd computed berechnet berechneter calcule calculado",
    "nominal": "nom nenn nominale",
    "diameter": "dia diam durchmesser diametre diametro ø ⌀",
    "inside": "internal inner id i/d innen",
    "size": "sizes taille tamano",
    "pipe": "line lines leitung ligne linea piping pipeline rohr rohrleitung conduite tuyauterie tuberia pipework",
    "wall": "wandstarke wand",
    "thickness": "thk thick epaisseur espesor dicke",
    "schedule": "sch sched",
    "velocity": "vel speed geschwindigkeit vitesse velocidad",
    "noise": "bruit ruido gerausch sonore",
    "sound": "acoustic schall",
    "level": "pegel niveau nivel",
    "opening": "offnung ouverture apertura opng",
    "travel": "hub carrera course ventilhub trvl",
    "characteristic": "kennlinie characteristics char caracteristique caracteristica",
    "number": "no nr num # n° nbr numero",
    "tag": "repere messstelle messstellen etiqueta kks",
    "service": "servicio",
    "fluid": "fluide fluido",
    "medium": "media produkt",
    "cavitation": "kavitation cavitacion cav cavit",
    "index": "indice idx kennzahl indices indexes",
    "factor": "faktor facteur fact factors",
    "recovery": "recov recuperation recuperacion",
    "allowable": "allowed permissible admissible allow zulassig perm",
    "choked": "choke chokes choking",
    "incipient": "inception incip onset beginning begin",
    "constant": "steady",
    "specific": "spec sp",
    "gravity": "grav gr",
    "relative": "rel",
    "kinematic": "kin kinematisch cinematique cinematica",
    "dynamic": "dyn dynamisch dynamique dinamica",
    "atmospheric": "atm",
    "barometric": "baro luftdruck",
    "percent": "% pct per-cent",
    "maximum": "max maxi maximal maximo maxima maximaler",
    "minimum": "min mini minimal minimo minima",
    "normal": "norm nor",
    "predicted": "pred expected",
    "direction": "dir",
    "stage": "stufe",
    "elevation": "elev altitud",
    "fraction": "frac",
    "orifice": "ori",
    "vibration": "vibr",
    "damage": "damaging",
    "shutoff": "closeoff shut-off close-off",
    "rate": "rates",
    "condition": "conditions cond conds",
    "connection": "conn",
    "material": "matl mat",
    "revision": "rev",
    "document": "doc",
    "drawing": "dwg",
    "hydrotest": "hydro",
    "flash": "flashed",
}  # fmt: skip
_COMPOUNDS = {
    "vordruck": "inlet pressure", "eingangsdruck": "inlet pressure", "eintrittsdruck": "inlet pressure",
    "ausgangsdruck": "outlet pressure", "austrittsdruck": "outlet pressure", "hinterdruck": "outlet pressure",
    "nachdruck": "outlet pressure", "differenzdruck": "pressure drop", "druckdifferenz": "pressure drop",
    "druckabfall": "pressure drop", "druckverlust": "pressure drop", "dampfdruck": "vapour pressure",
    "sattigungsdruck": "vapour pressure", "siededruck": "vapour pressure", "luftdruck": "atmospheric pressure",
    "volumenstrom": "volume flow", "volumendurchfluss": "volume flow", "massenstrom": "mass flow",
    "massendurchfluss": "mass flow", "eintrittstemperatur": "inlet temperature",
    "betriebstemperatur": "temperature", "mediumstemperatur": "temperature", "nennweite": "nominal size",
    "ventilnennweite": "valve nominal size", "schalldruckpegel": "sound pressure level",
    "schallpegel": "sound level", "stellverhaltnis": "rangeability", "durchflusskoeffizient": "flow coefficient",
    "durchflussbeiwert": "flow coefficient", "kavitationszahl": "cavitation index",
    "kavitationsindex": "cavitation index", "innendurchmesser": "inside diameter",
    "austrittsgeschwindigkeit": "outlet velocity", "eintrittsgeschwindigkeit": "inlet velocity",
    "druckruckgewinnungsfaktor": "pressure recovery factor", "wandstarke": "wall thickness",
    "wanddicke": "wall thickness", "backpressure": "back pressure", "flowrate": "flow rate",
    "dp": "pressure drop", "d/p": "pressure drop", "deltap": "pressure drop", "rd": "relative density",
    "medientemperatur": "temperature", "kvwert": "kv", "kvswert": "kvs", "cvwert": "cv", "druckstufe": "rating",
    "spgr": "specific gravity", "sgr": "specific gravity", "downstr": "outlet", "upstr": "inlet",
    "rohrinnendurchmesser": "pipe inside diameter", "rohrdurchmesser": "pipe diameter",
    "rohraussendurchmesser": "pipe outside diameter", "atmospharendruck": "atmospheric pressure",
    "umgebungsdruck": "atmospheric pressure", "durchflussbegrenzt": "choked", "durchflussbegrenzte": "choked",
    "grenzdruckdifferenz": "choked pressure drop", "od": "outside diameter",
    "positionsnummer": "tag number", "messstellennummer": "tag number", "einbauort": "location",
    "auslegungsdruck": "design pressure",
}  # fmt: skip
_PHRASES = (
    # Where the meaning is in several words together.
    (r"masse volumique|masa volumica", "density"),
    (r"tension de vapeur|pression de vapeur|presion de vapor", "vapour pressure"),
    (r"perte de charge|caida de presion|chute de pression", "pressure drop"),
    (r"shut ?- ?off|close ?- ?off|shut off|close off", "shutoff"),
    (r"\bF_?L_?\^?2(?!\w)", "recovery factor square"),
    (r"s\.g\.?|sp\. ?gr\.?|spec\. ?grav\.?", "sg"),
    (r"i\.d\.?", "inside diameter"),
    (r"o\.d\.?", "outside diameter"),
    (r"req ?[’'`] ?d", "required"),
    (r"calc ?[’'`] ?d", "calculated"),
    (r"per ?cent", "percent"),
    (r"\(?\bp_?1 ?[-–−] ?p_?2\b\)?", ""),
    (r"cavitating ?\?", "cavitation"),
    (r"\(?\b(?:IEC|ISA|ANSI|EN|DIN|ISO|VDMA)\b[ -]?[\d.\-: ]*\)?", ""),
    (r"(?<=[KC]v)(?: at| @)? 100\b ?%?", " rated"),
    (r"fully[- ]?open|full[- ]open|wide[- ]open|100 ?% ?(?:open|travel|opening|lift)", "rated"),
    (r"\bflow ?- ?rate\b", "flow rate"),
    (r"bruit acoustique", "noise"),
    (r"(?:above|uber) (?:mean )?(?:sea level|meer|nn)|\ba\.?m?\.?s\.?l\b\.?", "above sea level"),
    (r"\bno(?: |\. ?)of\b|\bnumber of\b|\b# of\b", "number of "),
)
CASE_WORDS = ("minimum", "normal", "maximum", "startup", "upset", "nominal", "turndown", "shutdown", "emergency",
              "design", "future")  # fmt: skip
FILLERS = frozenset((
    "of", "the", "at", "for", "to", "a", "an", "by", "with", "on", "per", "is", "and", "in", "from", "into",
    "value", "values", "valve", "actual", "data", "total", "flow", "operating", "process", "condition", "liquid",
    "fluid", "calculated", "predicted", "estimated", "de", "des", "du", "la", "le", "der", "die", "das", "bei",
    "en", "el", "del", "los", "i", "e", "l", "medium", "side", "through", "across", "between", "working",
    "weighted", "1", "m", "hydrodynamic", "thermodynamic", "kv100", "nominal", "required", "typical", "resulting",
    "given", "specified", "system", "body", "control", "measured", "rate", "quantity", "wert", "incl", "including",
    "excl", "excluding", "fittings", "reducers", "seller", "vendor", "supplied", "type", "line", "inherent",
    "stated", "each", "this", "that", "its",
))  # fmt: skip
"""Words that change nothing where a quantity is named without them; some are part of names and count there."""
FOREIGN = frozenset((
    "filter", "strainer", "actuator", "pump", "relief", "bypass", "steam", "gas", "air", "compressor", "tank", "vessel",
    "cooling", "jacket", "tracing", "cooler", "heater", "exchanger", "gland", "packing", "isolation", "drain", "vent",
    "margin", "tolerance", "rise", "ratio", "time", "test", "set", "outside", "solids", "leakage", "spring",
    "diaphragm", "squared", "square", "shutoff", "closed", "hose", "seal", "bellows", "lining", "insulation",
))  # fmt: skip
"""Words of other things: with one of them a label names something else, unless the word is part of the name."""
_SINGLES = {
    symbol: f"@{symbol}" for term in TERMS for symbol in term.symbols if len(symbol) == 1
}  # Q, T, W, d, h, R: their case counts
_SYMBOLS = {symbol.lower() for term in TERMS for symbol in term.symbols if len(symbol) > 1} | {
    "kv", "cv", "kc", "km", "kvreq", "cvreq", "kvcalc", "cvcalc", "sigma", "dn", "nps",
}  # fmt: skip
_GREEK = {"σ": "sigma", "ς": "sigma", "Σ": "sigma", "ρ": "rho", "ν": "nu", "μ": "mu", "µ": "mu", "η": "eta"}
_LIMIT_SIGNS = {"i", "c", "id", "mv", "ch", "d", "choked"}
_GAUGE = {"gauge": True, "gage": True, "gau": True, "ga": True, "g": True, "uberdruck": True, "relatif": True,
          "absolute": False, "abs": False, "absolut": False, "absolu": False, "absoluto": False, "absolue": False,
          "a": False}  # fmt: skip
_STROKED = frozenset({"d/p", "u/s", "d/s", "i/d"})
_TOKEN = re.compile(r"[A-Za-z0-9]+(?:[_/][A-Za-z0-9]+)*|%|#|ø|⌀")


def _synonyms() -> dict[str, tuple[str, ...]]:
    found: dict[str, tuple[str, ...]] = {word: (name,) for name, others in _EQUAL.items() for word in others.split()}
    found.update({word: tuple(phrase.split()) for word, phrase in _COMPOUNDS.items()})
    return found


_SYNONYMS = _synonyms()


class Words:
    """A folded label: its words as a set, the case signs among them, and what it says of the reference."""

    __slots__ = ("cases", "gauge", "text", "tokens")

    def __init__(self, text: str, tokens: frozenset[str], gauge: bool | None) -> None:
        self.text, self.tokens, self.gauge = text, tokens, gauge
        self.cases = tuple(word for word in CASE_WORDS if word in tokens)


def plain(text: str) -> str:
    """Signs that look alike made equal, accents taken off, spaces single; upper and lower case kept."""
    text = unicodedata.normalize("NFKC", text).replace("\N{INCREMENT}", "Δ").replace("ß", "ss")
    text = "".join(c for c in unicodedata.normalize("NFD", text) if not unicodedata.combining(c) or c == "\u0338")
    text = re.sub(r"[Δδ]\s*[pP]\b", "dp", text)
    text = re.sub(r"[Δδ]\s*[pP](?=[\s_,]|[a-z])", "dp", text)
    text = re.sub(r"\b[dD](?:elta)[\s-]*[pP]\b", "dp", text)
    for sign, name in _GREEK.items():
        text = text.replace(sign, name)
    return " ".join(text.split())


@lru_cache(8192)
def folded(text: str) -> Words:
    """The words of a label (units already taken off)."""
    said = plain(text)
    for pattern, words in _PHRASES:
        said = re.sub(pattern, f" {words} ", said, flags=re.IGNORECASE)
    # Subscripts written with a stroke below or a space: F_L, x_Fz, L_p,A
    said = re.sub(r"\bL_?p_?,? ?A?e?_?,?1? ?m?\b(?=$|[\s)(\]])", " LpA ", said) if re.search(r"\bL_?p", said) else said
    said = re.sub(r"\b([FfxKkCcLpPTD])_([A-Za-z0-9]{1,3})\b", r"\1\2", said)
    said = re.sub(r"\bsigma_(?=[a-z]{4})", "sigma ", said)
    said = re.sub(r"\bsigma[_ ,]*(mv|id|ch|i|c|d)\b", r"sigma\1", said, flags=re.IGNORECASE)
    said = re.sub(r"\bF ([LPFd])\b", r"F\1", said)
    said = re.sub(r"\b([pP]) ([12v])\b", r"p\2", said)
    said = re.sub(r"\b([KC]) (v|vs)\b", r"\1\2", said)
    said = re.sub(r"(?<=[a-z])\.(?=[A-Za-z])", ". ", said)
    said = re.sub(r"\bin ?/ ?out\b", "inlet outlet", said, flags=re.IGNORECASE)
    raw = [
        part
        for token in _TOKEN.findall(said)
        for part in (token.split("/") if "/" in token and token.lower() not in _STROKED else [token])
    ]
    tokens: list[str] = []
    gauge: bool | None = None
    for place, token in enumerate(raw):
        low = token.lower().replace("_", "")
        if low in _GAUGE and (
            len(low) > 2 or (len(raw) > 1 and re.search(rf"[(\[,]\s*{re.escape(token)}\s*[)\]]?\.?", said))
        ):
            gauge = _GAUGE[low]
            if gauge is False and low == "absolute" and "viscosity" in said.lower():
                gauge = None
            continue
        tokens += _one(token, low, place, len(raw))
    return Words(text, frozenset(tokens), gauge)


def _one(token: str, low: str, place: int, count: int) -> tuple[str, ...]:
    if low == "in":
        return ("inlet",) if place == count - 1 and count > 1 else ("in",)
    if low in ("dp", "d/p"):
        return "pressure", "drop"
    if low in _SYMBOLS:
        return (f"@{low}",)
    if token in _SINGLES:
        return (_SINGLES[token],)
    found = _SYNONYMS.get(low)
    if found:
        return tuple(f"@{word}" if word in _SYMBOLS else word for word in found)
    if len(low) > 4 and low.endswith("s") and low[:-1] in _EQUAL:
        return (low[:-1],)
    return (low,)
