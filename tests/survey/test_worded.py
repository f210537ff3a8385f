"""Sentences in either set of units: each number against its unit's definition."""

from __future__ import annotations

import pytest

from lowpoint.survey.worded import amount, said


@pytest.mark.parametrize(
    ("mark", "metric", "us"),
    [
        # 1 psi = 6894.757 Pa, 1 in = 25.4 mm, 1 ft = 0.3048 m (SI brochure, NIST SP 811); Cv = 1.156 Kv (IEC 60534-1)
        (amount(1.5e5, "pressure"), "1.5 bar", "21.76 psi"),
        (amount(1.5e5, "absolute pressure", ".5g"), "1.5 bar a", "21.756 psia"),
        (amount(1.5e5, "pressure", bare=True), "1.5", "21.76"),
        (amount(0.0425, "size", ".5g"), "42.5 mm", "1.673 in"),
        (amount(12.0, "elevation", ".1f"), "12.0 m", "39.4 ft"),
        (amount(353.15, "temperature", ".1f"), "80.0 deg C", "176.0 deg F"),
        (amount(10.0, "temperature difference", ".1f"), "10.0 K", "18.0 deg F"),
    ],
)
def test_a_number_in_both_sets(mark: str, metric: str, us: str) -> None:
    assert said(f"so {mark}.") == f"so {metric}."
    assert said(f"so {mark}.", "us") == f"so {us}."


@pytest.mark.parametrize(("dn", "inches"), [(15, "1/2"), (40, "1 1/2"), (50, "2"), (65, "2 1/2"), (80, "3"), (100, "4"),
                                            (125, "5"), (150, "6"), (300, "12"), (600, "24")])  # fmt: skip
def test_a_nominal_size_keeps_its_name(dn: int, inches: str) -> None:
    """DN and NPS go together by name, not by conversion. Source: common practice (ISO 6708 and ASME B36.10)."""
    mark = amount(1e-3 * dn, "nominal size", ".5g")
    assert said(mark) == f"{dn} mm"
    assert said(mark, "us") == f"{inches} in"
    assert said(amount(0.0508, "nominal size", ".5g"), "us") == "2 in"


def test_what_must_be_at_least_is_never_rounded_down() -> None:
    """20.0003 psi up to four digits is 20.01, down 20; a number that is as it is printed stays."""
    x = 20.0003 * 6894.757293168361
    assert said(amount(x, "pressure", rounding="up"), "us") == "20.01 psi"
    assert said(amount(x, "pressure", rounding="down"), "us") == "20 psi"
    assert said(amount(0.1892e5, "pressure", rounding="up")) == "0.1892 bar"
    assert said(amount(373.85, "temperature", ".1f", "down"), "us") == "213.2 deg F"  # 100.7 C is 213.26 F


def test_a_sentence_without_marks_stays_as_it_is() -> None:
    assert said("case '{odd}' | 5 bar", "us") == "case '{odd}' | 5 bar"
