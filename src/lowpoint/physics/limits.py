"""Limits carried to another size, pressure and installation, and the estimate of inception."""

from __future__ import annotations

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics import fittings
from lowpoint.physics.fittings import fitting_losses, geometry_factor2
from lowpoint.physics.indices import LOW_LIMIT
from lowpoint.units import CV_PER_KV, KV

__all__ = ["inception_estimate", "installed_limit", "scaled_limit"]

TEST_PRESSURE = 6e5
"""Inlet pressure at which xFz is stated, Pa (IEC 60534-8-4)."""

_CREDIT = Caution(
    "the wanted size or head is below the tested one: no credit is given for it (factor 1)",
    lambda size, size_ref, head, head_ref: (size < size_ref) | (head < head_ref),
)


@function(
    "SIGMA_SCALED", group="indices and limits", gives="limit carried to another size and head, upstream form",
    source_key="ISA-RP75.23",
    equation="isa (limit SSE - 1) PSE + 1; upstream limit SSE PSE; tullis (limit - 1) SSE PSE + 1; "
    "SSE = (size/size_ref)^b, PSE = (head/head_ref)^a, each at least 1",
    any_unit=True,
    no_answer=(NoAnswer("the limit must be above 1: another form was meant (LP_SIGMA_FORM carries it over)",
                        lambda limit: limit <= 1.0),),
    cautions=(
        _CREDIT,
        Caution("exponents belong to one method and come from tests; a choking limit is never scaled",
                lambda size_exponent, head_exponent: (size_exponent > 0.0) | (head_exponent > 0.0)),
        Caution("the form of this method is from memory", lambda method: np.asarray(method == "tullis")),
    ),
)  # fmt: skip
def scaled_limit(
    limit: q.Limit, size: q.Size, size_ref: q.SizeRef, head: q.Head, head_ref: q.HeadRef,
    size_exponent: q.SizeExponent, head_exponent: q.HeadExponent, method: q.ScaleMethod = "isa",
) -> q.Ratio:  # fmt: skip
    """Scaled limit, ``sigma = (limit SSE - 1) PSE + 1`` by method ``isa``; see the equation for the others.

    Arrays of one length; size and head in any one unit each; ``SSE = (size/size_ref)^b`` and
    ``PSE = (head/head_ref)^a``, neither ever below 1. NaN for a limit at or below 1.
    Source: ISA-RP75.23 (method isa); Tullis, from memory (method tullis).
    """
    sse = np.maximum((size / size_ref) ** size_exponent, 1.0)
    pse = np.maximum((head / head_ref) ** head_exponent, 1.0)
    tullis = (limit - 1.0) * sse * pse + 1.0
    isa = (limit * sse - 1.0) * pse + 1.0
    scaled = np.where(method == "isa", isa, np.where(method == "tullis", tullis, limit * sse * pse))
    return np.where(limit > 1.0, scaled, np.nan)


@function(
    "LIMIT_INSTALLED", group="indices and limits",
    gives="limit of the bare valve as it holds for the valve between its reducers, upstream form",
    source_key="closed form", equation="FP^2 (limit + (K1+KB1) (C/d^2)^2/N2)",
    no_answer=(fittings.TOO_LARGE, fittings.GAIN),
    cautions=(
        LOW_LIMIT,
        fittings.LINE_SIZE, fittings.LARGE_CAPACITY,
    ),
)  # fmt: skip
def installed_limit(
    limit: q.Limit, coefficient: q.Coefficient, valve_size: q.ValveSize, pipe_in: q.PipeIn, pipe_out: q.PipeOut
) -> q.Ratio:  # fmt: skip
    """Limit between reducers, ``FP^2 (limit + (K1+KB1) c)``, with p1 and p2 at the test sections outside them.

    Arrays of one length, SI (C as Av in m2). For limit 1/FL^2 it is FP^2/FLP^2. NaN where d is above 1.1 D.
    Source: derived from the fittings' equations of IEC 60534-2-1.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    return geometry_factor2(coefficient, total) * (limit + inlet * coefficient * coefficient)


@function(
    "XFZ", group="indices and limits",
    gives="estimated xF at which cavitation begins (1/xFz is a limit, upstream form)",
    source_key="IEC 60534-8-4", equation="0.90/sqrt(1 + 3 Fd sqrt(Cv/(1.17 FL))); at p1 times (6 bar/p1)^0.125",
    basis="estimated",
    basis_text="the acoustic estimate of IEC 60534-8-4 for standard trims; a screening value, never a damage limit",
)  # fmt: skip
def inception_estimate(
    coefficient: q.Coefficient, fl: q.FL, fd: q.Fd, p1: q.P1 = None  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Estimated inception, ``xFz = 0.90/sqrt(1 + 3 Fd sqrt(Cv/(1.17 FL)))``, at p1 ``xFz (6 bar/p1)^0.125``.

    Arrays of one length, SI (C as Av in m2, computed in Cv). Without p1 the value at 6 bar.
    Source: IEC 60534-8-4.
    """
    cv = coefficient * (CV_PER_KV / KV)
    xfz = 0.90 / np.sqrt(1.0 + 3.0 * fd * np.sqrt(cv / (1.17 * fl)))
    if p1 is None:
        return xfz
    at_pressure = xfz * (TEST_PRESSURE / p1) ** 0.125
    return np.where(np.isnan(p1), xfz, at_pressure)
