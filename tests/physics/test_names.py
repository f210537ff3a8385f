"""Liquids by name: all of them reachable, no two alike, and a helpful sentence for the rest."""

from __future__ import annotations

import csv
import re
from importlib import resources

import pytest
from CoolProp import CoolProp

from lowpoint import functions
from lowpoint.cells import call, reason
from lowpoint.physics import names
from lowpoint.problems import CellError

# What the property library lists and is no pure substance with a liquid of its own name here.
NOT_PURE = {"Air", "R404A", "R407C", "R410A", "R507A", "SES36"}
"""Mixtures that the library treats as if they were pure: their bubble and dew points differ."""
BY_ANOTHER_NAME = {
    "PropyleneGlycol": "pure propylene glycol",  # as it flows in plants it is mixed with water
    "Novec649": "FK-5-1-12",  # a brand; the substance has a designation of ISO 817
}


def _listed() -> list[str]:
    return CoolProp.get_global_param_string("FluidsList").split(",")


def _rows() -> list[dict[str, str]]:
    table = resources.files("lowpoint").joinpath("tables/fluid_names.csv").read_text("utf-8")
    return list(csv.DictReader(table.splitlines()))


@pytest.mark.parametrize("listed", sorted(set(_listed()) - NOT_PURE))
def test_every_pure_fluid_of_the_library_is_reachable_and_has_a_liquid(listed: str) -> None:
    asked = BY_ANOTHER_NAME.get(listed, listed)
    name = names.resolve(asked)
    assert names.key_of(name) == CoolProp.get_fluid_param_string(listed, "CAS")
    low, critical = CoolProp.PropsSI("Tmin", listed), CoolProp.PropsSI("Tcrit", listed)
    t = low + 0.5 * (critical - low)
    # Half way to the critical point, by the library's own long way.
    expected = CoolProp.PropsSI("P", "T", t, "Q", 0, listed)
    assert functions["LP_VAPOUR_PRESSURE"](asked, t - 273.15) * 1e5 == pytest.approx(expected, rel=1e-6)
    assert functions["LP_DENSITY"](asked, t - 273.15) == pytest.approx(
        CoolProp.PropsSI("D", "T", t, "Q", 0, listed), rel=1e-6
    )


def test_the_lists_above_are_true() -> None:
    assert set(_listed()) >= NOT_PURE | set(BY_ANOTHER_NAME)
    assert {row["key"] for row in _rows() if row["kind"] == "pure"} == {
        CoolProp.get_fluid_param_string(listed, "CAS") for listed in set(_listed()) - NOT_PURE
    }
    for listed in NOT_PURE:
        assert call("LP_VAPOUR_PRESSURE", [listed, 20.0]) is CellError.VALUE
    for listed, other in BY_ANOTHER_NAME.items():
        assert call("LP_VAPOUR_PRESSURE", [listed, 20.0]) is CellError.VALUE
        assert isinstance(call("LP_VAPOUR_PRESSURE", [other, 20.0]), float)


def test_no_spelling_means_two_liquids() -> None:
    """Compared as a cell's text is: without case, spaces and signs."""
    owners: dict[str, str] = {}
    for row in _rows():
        for spelling in (row["name"], *filter(None, row["aliases"].split("|"))):
            folded = re.sub(r"[\W_]+", "", spelling).casefold()
            assert folded, spelling
            assert owners.setdefault(folded, row["name"]) == row["name"], spelling


def test_the_table_is_whole() -> None:
    rows = _rows()
    assert rows[0]["name"] == names.known_names()[0] == "water"
    assert {row["kind"] for row in rows} == {"pure", "sea water", "mixture", "not covered", "ambiguous"}
    assert all(row["source"] and row["mark"] in ("L", "M") for row in rows)
    assert len({row["name"] for row in rows}) == len(rows)
    assert all(bool(row["key"]) == (row["kind"] in ("pure", "sea water")) for row in rows)
    assert names.known_names() == [row["name"] for row in rows if row["key"]]
    for name in names.known_names():
        assert names.resolve(name) == name


ALIASES = {
    # Common practice: what the lists of a plant call these liquids.
    "water": ["steam condensate", "Boiler feed water", "BFW", "demin water", "Demineralised  Water",
              "DEMINERALIZED WATER", "cooling-water", "H2O", "H\N{SUBSCRIPT TWO}O", "district heating water",
              "condensate", "potable water", "  water" + 80 * " "],
    "sea water": ["seawater", "Sea-Water", "SEA WATER", "salt water"],
    "brine": ["reject brine", "desalination brine"],
    "propane": ["Propane", "R290", "C3H8", "R-290", "n-propane", "liquid propane"],
    "n-butane": ["butane", "n butane", "R600", "normal butane"],
    "n-hexane": ["n hexane", "hexane", "N-HEXANE", "nHexane"],
    "R134a": ["R134a", "R-134a", "r 134 A", "R\N{EN DASH}134a"],
    "ammonia": ["NH3", "anhydrous ammonia", "R717", "Liquid ammonia"],
    "methanol": ["MeOH", "methyl alcohol", "CH3OH"], "ethanol": ["ethyl alcohol", "EtOH"],
    "carbon dioxide": ["CO2", "R744", "CO\N{SUBSCRIPT TWO}"], "carbon monoxide": ["CO"],
    "nitrogen": ["LN2", "liquid nitrogen"], "oxygen": ["LOX"], "hydrogen sulfide": ["H2S", "hydrogen sulphide"],
    "sulfur dioxide": ["sulphur dioxide", "SO2"], "R1234ze(E)": ["R1234ze(E)", "R1234zeE", "R-1234ze (E)"],
    "1,2-dichloroethane": ["EDC", "ethylene dichloride", "1,2 dichloroethane"], "hydrogen chloride": ["pure HCl"],
    "vinyl chloride": ["VCM"], "diethyl ether": ["DEE"], "n-dodecane": ["C12", "dodecane"],
}  # fmt: skip


@pytest.mark.parametrize(("name", "alias"), [(name, alias) for name, aliases in ALIASES.items() for alias in aliases])
def test_aliases(name: str, alias: str) -> None:
    assert names.resolve(alias) == name
    t = -20.0 if name == "carbon dioxide" else 20.0
    if name in ("nitrogen", "oxygen", "carbon monoxide"):
        t = -180.0
    expected = call("LP_VAPOUR_PRESSURE", [name, t])
    assert isinstance(expected, float)
    assert call("LP_VAPOUR_PRESSURE", [alias, t]) == expected


@pytest.mark.parametrize(
    ("slip", "meant"),
    [
        ("watr", "water"), ("propan", "propane"), ("amonia", "ammonia"), ("methnol", "methanol"), ("R134", "R134a"),
        ("sea watr", "sea water"), ("steam", "steam condensate"), ("n-hexan", "n-hexane"), ("demin", "demin water"),
        ("toluol", "toluene"), ("isopentan", "isopentane"), ("naptha", "naphtha (a mixture)"),
    ],
)  # fmt: skip
def test_an_unknown_name_gets_the_nearest(slip: str, meant: str) -> None:
    assert call("LP_VAPOUR_PRESSURE", [slip, 20.0]) is CellError.VALUE
    said = reason("LP_VAPOUR_PRESSURE", [slip, 20.0])
    assert said.startswith(f"LP_VAPOUR_PRESSURE: fluid must be a known liquid, got '{slip}'; nearest: ")
    assert meant in said.split("nearest: ")[1].split(". ")[0].split(", ")
    assert "give pv" in said


@pytest.mark.parametrize("fluid", ["qwertz", "zzzz", "#", " ", "."])
def test_a_name_like_no_other(fluid: str) -> None:
    assert call("LP_VAPOUR_PRESSURE", [fluid, 20.0]) is CellError.VALUE
    said = reason("LP_VAPOUR_PRESSURE", [fluid, 20.0])
    assert "nearest" not in said
    assert "give pv" in said


@pytest.mark.parametrize(
    "mixture",
    ["ethylene glycol water", "MEG", "glycol", "LPG", "diesel", "naphtha", "crude oil", "NaOH", "caustic soda", "R410A",
     "sulphuric acid", "aqua ammonia", "kerosene", "fuel oil", "30% glycol", "water 50 %", "sugar solution", "some oil",
     "hydrocarbon mix", "C4 blend", "air", "jet A-1"],
)  # fmt: skip
def test_a_mixture_is_asked_for_pv(mixture: str) -> None:
    for name in ("LP_VAPOUR_PRESSURE", "LP_DENSITY"):
        assert call(name, [mixture, 20.0]) is CellError.VALUE
        said = reason(name, [mixture, 20.0])
        assert "mixture" in said
        assert "give pv, pc and density" in said


@pytest.mark.parametrize("fluid", ["glycerol", "isopropanol", "ethylene glycol", "styrene", "MEK", "mercury"])
def test_a_pure_liquid_without_an_equation_is_asked_for_pv(fluid: str) -> None:
    assert call("LP_CRITICAL_PRESSURE", [fluid]) is CellError.VALUE
    said = reason("LP_CRITICAL_PRESSURE", [fluid])
    assert "no equation of state" in said
    assert "give pv" in said


@pytest.mark.parametrize(
    ("word", "pure"),
    [("propylene glycol", "pure propylene glycol"), ("PG", "pure propylene glycol"), ("HCl", "pure HCl")],
)
def test_a_name_for_both_a_substance_and_its_solution(word: str, pure: str) -> None:
    assert call("LP_VAPOUR_PRESSURE", [word, 20.0]) is CellError.VALUE
    assert f"'{pure}'" in reason("LP_VAPOUR_PRESSURE", [word, 20.0])
    assert isinstance(call("LP_VAPOUR_PRESSURE", [pure, 20.0]), float)


@pytest.mark.parametrize("text", ["water " * 5000, "x" * 32767, "\x00" * 100, "(" * 61])
def test_long_texts_are_refused_at_once_in_a_short_sentence(text: str) -> None:
    assert call("LP_VAPOUR_PRESSURE", [text, 20.0]) is CellError.VALUE
    said = reason("LP_VAPOUR_PRESSURE", [text, 20.0])
    assert len(said) < 200
    assert f"{len(text.strip())} letters" in said


def test_the_longest_name_fits() -> None:
    longest = max((s for row in _rows() for s in (row["name"], *row["aliases"].split("|"))), key=len)
    assert len(longest) <= names.LONGEST


def test_a_blank_name_is_missing() -> None:
    for blank in (None, ""):
        assert call("LP_VAPOUR_PRESSURE", [blank, 20.0]) is CellError.NA
