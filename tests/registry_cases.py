"""Arguments for every function of the registry, made from the working ranges that the quantities state."""

from __future__ import annotations

from typing import Any

from lowpoint.declare import Parameter
from lowpoint.quantities import Quantity, Table, Word
from lowpoint.registry import Function, functions

__all__ = ["PROMISED", "example", "names", "numbers", "perturbed"]

_GOLDEN = 0.6180339887498949

FIXED: dict[str, dict[str, Any]] = {
    # Where arguments must fit each other more closely than their working ranges say.
    "UNIT": {"value": 3.5, "from": "bar", "to": "kPa"},
    "SIGMA_FORM": {"value": 2.4, "from": "downstream", "to": "upstream"},
    "TRAVEL": {"characteristic": "equal percentage"},
    "TYPICAL": {"property": "fl", "direction": "open"},
    "OPERATING_TRAVEL": {"flow": 120.0},
    "FLASH": {"fluid": "water", "t": 150.0, "p1": 10.0, "p2": 2.0},
    "FLASH_DENSITY": {"fluid": "water", "t": 150.0, "p1": 10.0, "p2": 2.0},
    "SATURATION_TEMPERATURE": {"fluid": "water", "p": 3.0},
    "DENSITY": {"fluid": "water", "t": 40.0, "p": 12.0},
    "VISCOSITY": {"fluid": "water", "t": 40.0, "p": 12.0},
    "SOUND_SPEED": {"fluid": "water", "t": 40.0, "p": 12.0},
    "ALLOWED_TEMPERATURE": {"fluid": "water", "p1": 10.0, "p2": 6.0, "limit": 1.8},
}


def names() -> list[str]:
    """Every function but LP_WHY, which takes any arguments."""
    return sorted(name for name, function in functions.items() if not function.variadic)


def _middle(function: Function, parameter: Parameter) -> Any:
    kind = parameter.kind
    if isinstance(kind, Quantity):
        low, high = kind.working
        return _own_unit(function, parameter, low + (high - low) * _GOLDEN)
    if isinstance(kind, Word):
        return kind.words[0]
    if isinstance(kind, Table):
        cells = [_own_unit(function, parameter, float(value)) for value in kind.working]
        return [cells[i : i + kind.width] for i in range(0, len(cells), kind.width)]
    return kind.working[0]


def _own_unit(function: Function, parameter: Parameter, metric: float) -> float:
    """A metric cell value in the unit of this function."""
    from lowpoint.units import dimension

    kind = parameter.kind
    assert isinstance(kind, Quantity | Table)
    if function.system != "us":
        return metric
    return function.checked.units[parameter.name].from_si(dimension(kind.dimension).metric.to_si(metric))


def example(name: str) -> list[Any]:
    """One answered call: every argument given but those that exclude each other."""
    function = functions[name]
    fixed = FIXED.get(function.declaration.name, {})
    args: list[Any] = []
    for parameter in function.parameters:
        if parameter.name not in fixed:
            args.append(_middle(function, parameter))
        elif isinstance(parameter.kind, Quantity):
            args.append(_own_unit(function, parameter, fixed[parameter.name]))
        else:
            args.append(fixed[parameter.name])
    return args


def numbers(name: str) -> list[int]:
    """Places of the number arguments."""
    return [i for i, p in enumerate(functions[name].parameters) if p.is_number]


def perturbed(name: str, rows: int) -> list[list[Any]]:
    """The example moved a little, differently in every argument and row."""
    base = example(name)
    return [
        [
            value * (1.0 + 0.002 * row * (0.3 + (place * _GOLDEN) % 1.0)) if place in numbers(name) else value
            for place, value in enumerate(base)
        ]
        for row in range(rows)
    ]


def _order(text: str) -> list[str]:
    return [word.strip() for word in text.split(",")]


PROMISED = {
    name: _order(order)
    for name, order in {
        "LP_VAPOUR_PRESSURE": "fluid, t, [salinity]",
        "LP_SATURATION_TEMPERATURE": "fluid, p",
        "LP_CRITICAL_PRESSURE": "fluid",
        "LP_DENSITY": "fluid, t, [p], [salinity]",
        "LP_VISCOSITY": "fluid, t, [p], [salinity]",
        "LP_SOUND_SPEED": "fluid, t, [p]",
        "LP_ATMOSPHERE": "elevation",
        "LP_COLUMN": "p, rise, density",
        "LP_UNIT": "value, from, to, [atmosphere]",
        "LP_FF": "pv, pc",
        "LP_FP": "coefficient, valve_size, pipe_in, pipe_out",
        "LP_FLP": "fl, coefficient, valve_size, pipe_in",
        "LP_CHOKED_DROP": "p1, pv, pc, fl, [coefficient], [valve_size], [pipe_in], [pipe_out]",
        "LP_COEFFICIENT": "flow, p1, p2, pv, pc, density, fl, [valve_size], [pipe_in], [pipe_out], [viscosity], "
        "[fd], [trim]",
        "LP_FLOW": "coefficient, p1, p2, pv, pc, density, fl, [valve_size], [pipe_in], [pipe_out], [viscosity], "
        "[fd], [trim]",
        "LP_DROP": "flow, coefficient, p1, pv, pc, density, fl, [valve_size], [pipe_in], [pipe_out], [viscosity], "
        "[fd], [trim]",
        "LP_VALVE_REYNOLDS": "flow, coefficient, viscosity, density, fl, fd, pipe_in",
        "LP_TRAVEL": "coefficient, rated, characteristic, [rangeability]",
        "LP_OPERATING_TRAVEL": "flow, p1, p2, pv, pc, density, travels, coefficients, fls, [valve_size], [pipe_in], "
        "[pipe_out]",
        "LP_AT_TRAVEL": "travel, travels, values",
        "LP_TYPICAL": "style, property, [direction]",
        "LP_VELOCITY": "flow, bore",
        "LP_THROAT_PRESSURE": "p1, p2, fl, [pv], [pc]",
        "LP_FLASH": "fluid, t, p1, p2",
        "LP_FLASH_DENSITY": "fluid, t, p1, p2",
        "LP_SIGMA": "p1, p2, pv, [form]",
        "LP_SIGMA_FORM": "value, from, to",
        "LP_SIGMA_CHOKED": "p1, pv, pc, fl, [coefficient], [valve_size], [pipe_in], [pipe_out]",
        "LP_XFZ": "coefficient, fl, fd, [p1]",
        "LP_SIGMA_SCALED": "limit, size, size_ref, head, head_ref, size_exponent, head_exponent, [method]",
        "LP_LIMIT_INSTALLED": "limit, coefficient, valve_size, pipe_in, pipe_out",
        "LP_MARGIN": "sigma, limit",
        "LP_REGIME": "sigma, [incipient], [constant], [damage], [vibration], [choked]",
        "LP_ALLOWED_DROP": "p1, pv, limit, [form]",
        "LP_ALLOWED_OUTLET": "p1, pv, limit, [form]",
        "LP_ALLOWED_INLET": "p2, pv, limit, [form]",
        "LP_NOISE": "flow, p1, p2, pv, density, sound_speed, coefficient, fl, fd, valve_size, pipe_bore, pipe_wall, "
        "[xfz], [outlet_size]",
        "LP_ORIFICE_LOSS": "bore, pipe, [bore_length], [holes], [reynolds]",
        "LP_ORIFICE_DROP": "flow, bore, pipe, density, [viscosity], [bore_length], [holes], [taps]",
        "LP_ORIFICE_FLOW": "p1, p2, bore, pipe, density, pv, pc, [viscosity], [bore_length], [holes]",
        "LP_ORIFICE_BORE": "flow, p1, p2, pipe, density, pv, pc, [viscosity], [bore_length], [holes]",
        "LP_ORIFICE_FL": "bore, pipe, [bore_length], [holes]",
        "LP_ORIFICE_LIMIT": "limit, bore, pipe, [bore_length], [holes], [p1], [pv], [pc], [form]",
        "LP_STAGES": "p1, p2, pv, target, [form]",
        "LP_STAGE_PRESSURES": "p1, p2, pv, stages, [rule]",
        "LP_PLATE_THICKNESS": "drop, support_diameter, bore, stress, [support], [allowance]",
        "LP_ALLOWED_TEMPERATURE": "fluid, p1, p2, limit, [form]",
    }.items()
}
"""Argument orders as promised to users."""
