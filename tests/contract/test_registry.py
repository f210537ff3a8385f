"""What holds for every function of the registry: checks, broadcasting, bits, units, texts."""

from __future__ import annotations

import inspect
import itertools
import math
import re

import numpy as np
import pytest

from lowpoint.cells import OMITTED, CellError, Same, call, call_many, reason, reasons
from lowpoint.declare import declarations
from lowpoint.quantities import Quantity
from lowpoint.registry import functions
from registry_cases import example, names, numbers, perturbed

ROWS = 5


def same_bits(a: object, b: object) -> bool:
    if isinstance(a, float) and isinstance(b, float):
        return (math.isnan(a) and math.isnan(b)) or np.float64(a).tobytes() == np.float64(b).tobytes()
    if isinstance(a, list) and isinstance(b, list):
        return len(a) == len(b) and all(map(same_bits, a, b))
    return a == b and type(a) is type(b)


def plain(answer: object) -> object:
    """An answer from Python as a cell holds it."""
    if isinstance(answer, np.ndarray):
        return [[float(x)] for x in answer if x == x]
    return answer if isinstance(answer, str) else float(answer)  # type: ignore[arg-type]


@pytest.mark.parametrize("name", names())
def test_example_has_an_answer(name: str) -> None:
    """The example in the working range is answered, and LP_WHY has no complaint about it."""
    answer = call(name, example(name))
    assert not isinstance(answer, CellError), reason(name, example(name))
    if functions[name].column:
        assert isinstance(answer, list)
        assert all(isinstance(x, float) and math.isfinite(x) for [x] in answer)
        return
    assert isinstance(answer, str | float)
    assert not isinstance(answer, float) or math.isfinite(answer)


@pytest.mark.parametrize("name", names())
def test_scalar_equals_array_bit_for_bit(name: str) -> None:
    """One call, the same call in a column, in an array from Python and in a long array: the same double."""
    rows = perturbed(name, ROWS)
    columns = _columns(name, rows)
    many = call_many(name, columns, ROWS)
    for row, answer in zip(rows, many, strict=True):
        assert same_bits(call(name, row), answer)
    long = [c if isinstance(c, Same) else c * 1000 for c in columns]
    for a, b in zip(call_many(name, long, ROWS * 1000), itertools.cycle(many), strict=False):
        assert same_bits(a, b)
    for row, answer in zip(rows, many, strict=True):
        python = functions[name](*[None if a is OMITTED else a for a in row])
        if not isinstance(answer, CellError):
            assert same_bits(plain(python), answer)


@pytest.mark.parametrize("name", names())
def test_omitted_and_blank_give_the_same(name: str) -> None:
    """An optional argument left out, blank, an empty text and NaN are one; so is a mixture of rows."""
    function, args = functions[name], example(name)
    for place, parameter in enumerate(function.parameters):
        if parameter.required or parameter.is_table:
            continue
        left_out = [OMITTED if i == place else a for i, a in enumerate(args)]
        blank = [None if i == place else a for i, a in enumerate(args)]
        empty = ["" if i == place else a for i, a in enumerate(args)]
        answer = call(name, left_out)
        assert same_bits(call(name, blank), answer), parameter.name
        assert same_bits(call(name, empty), answer), parameter.name
        mixed = [
            Same(a) if functions[name].parameters[i].is_table else ([None, a] if i == place else [a, a])
            for i, a in enumerate(args)
        ]
        first, second = call_many(name, mixed, 2)
        assert same_bits(first, answer), parameter.name
        assert same_bits(second, call(name, args)), parameter.name


@pytest.mark.parametrize("name", names())
def test_blank_required_is_na(name: str) -> None:
    for place, parameter in enumerate(functions[name].parameters):
        if not parameter.required:
            continue
        args = [None if i == place else a for i, a in enumerate(example(name))]
        assert call(name, args) is CellError.NA, parameter.name
        assert re.search(rf"{name}: {parameter.name}\b.* must be given, got a blank cell", reason(name, args))


@pytest.mark.parametrize("name", names())
def test_text_for_a_number_and_unknown_words_are_value(name: str) -> None:
    for place, parameter in enumerate(functions[name].parameters):
        wrong = [["x"], ["y"]] if parameter.is_table else "no such word"
        args = [wrong if i == place else a for i, a in enumerate(example(name))]
        assert call(name, args) is CellError.VALUE, parameter.name
        assert parameter.name in reason(name, args)
        numeric_text = [a if i != place else "12" for i, a in enumerate(example(name))]
        assert call(name, numeric_text) is CellError.VALUE, f"{parameter.name}: text that looks like a number"


@pytest.mark.parametrize("name", names())
def test_out_of_bounds_is_num(name: str) -> None:
    function = functions[name]
    for place, parameter in enumerate(function.parameters):
        if not isinstance(parameter.kind, Quantity):
            continue
        low, high = function.checked.bounds(parameter.name)
        unit = function.checked.units[parameter.name].label
        for value in (math.inf, -math.inf, low - 1, high + 1, *([low] if not parameter.kind.closed_low else [])):
            if value == 0 and parameter.kind.zero_is_blank and not parameter.required:
                continue
            args = [value if i == place else a for i, a in enumerate(example(name))]
            assert call(name, args) is CellError.NUM, (parameter.name, value)
            said = reason(name, args)
            if math.isinf(value):
                assert f"{name}: {parameter.name} must be finite" in said
            else:
                assert f"{name}: {parameter.name} must be " in said
                assert f"got {value:.6g}{' ' + unit if unit else ''}" in said


@pytest.mark.parametrize("name", names())
@pytest.mark.parametrize("error", list(CellError))
def test_error_in_comes_out_unchanged(name: str, error: CellError) -> None:
    """The leftmost error wins, before any other check."""
    args = example(name)
    for place, parameter in enumerate(functions[name].parameters):
        wrong = [[error, error]] if parameter.is_table else error
        passed = [wrong if i == place else a for i, a in enumerate(args)]
        assert call(name, passed) is error, parameter.name
        if place + 1 < len(args) and not functions[name].parameters[place + 1].is_table:
            passed[place + 1] = "rubbish"
            assert call(name, passed) is error, parameter.name


@pytest.mark.parametrize("name", names())
def test_the_leftmost_of_several_errors_wins_in_tables_too(name: str) -> None:
    """Whatever else is wrong: two errors in any two arguments, scalars, tables, tables of one cell or a wrong width."""
    parameters = functions[name].parameters
    shapes = (lambda e: e, lambda e: [[e], [1.0]], lambda e: [[1.0, 2.0, 3.0], [e, None, "x"]])
    for i, j in itertools.combinations(range(len(parameters)), 2):
        for shape in shapes:
            args: list[object] = [None] * len(parameters)
            args[i] = shape(CellError.REF) if parameters[i].is_table else CellError.REF
            args[j] = shape(CellError.DIV0) if parameters[j].is_table else CellError.DIV0
            assert call(name, args) is CellError.REF, (parameters[i].name, parameters[j].name)


def test_a_logical_is_no_word() -> None:
    """FALSE is not the blank cell that 0 may stand for."""
    assert call("LP_SIGMA", [10.0, 4.0, 0.02, False]) is CellError.VALUE
    assert call("LP_SIGMA", [10.0, 4.0, 0.02, True]) is CellError.VALUE
    assert call("LP_SIGMA", [10.0, 4.0, 0.02, 0.0]) == call("LP_SIGMA", [10.0, 4.0, 0.02])


def test_the_reason_of_a_range_is_that_of_its_error() -> None:
    said = reason("LP_REGIME", [[[2.0], [None]], [[1.5], [1.5]]])
    assert said.startswith("LP_REGIME: sigma")
    assert reason("LP_WHY", ["LP_SIGMAA", 1.0]).startswith("LP_WHY: function must be the name of a function")
    assert "Nearest: LP_SIGMA" in reason("LP_WHY", ["LP_SIGMAA", 1.0])
    assert call("LP_WHY", ["SIGMA", 10.0, 5.0, 1.0]) == "ok"


@pytest.mark.parametrize("name", names())
def test_ranges_spill_and_short_ranges_are_na(name: str) -> None:
    function, args = functions[name], example(name)
    scalars = [i for i, p in enumerate(function.parameters) if not p.is_table]
    first = scalars[0]
    column = [[args[first]] if i == first else a for i, a in enumerate(args)]
    column[first] = [[args[first]], [args[first]], [args[first]]]
    one = call(name, args)
    if function.column:
        assert call(name, column) is CellError.VALUE
        assert "got a range" in reason(name, column)
        column[first] = [[args[first]]]
        assert call(name, column) == one
        return
    assert call(name, column) == [[one], [one], [one]]
    if len(scalars) > 1:
        second = scalars[1]
        crossed = list(column)
        crossed[second] = [[args[second], args[second]]]
        assert call(name, crossed) == [[one, one]] * 3
        short = list(column)
        short[second] = [[args[second]], [args[second]]]
        assert call(name, short) == [[one], [one], [CellError.NA]]


@pytest.mark.parametrize("name", names())
def test_too_many_arguments(name: str) -> None:
    args = [*example(name), 1.0]
    assert call(name, args) is CellError.VALUE
    assert "at most" in reason(name, args)


@pytest.mark.parametrize("name", names())
def test_reasons_of_columns_equal_single_reasons(name: str) -> None:
    rows = perturbed(name, ROWS)
    assert reasons(name, _columns(name, rows), ROWS) == [reason(name, row) for row in rows]


@pytest.mark.parametrize("name", sorted(n for n in names() if n.startswith("LPU_")))
def test_twin_agrees_after_conversion(name: str) -> None:
    """The same case in US units has the same answer in US units."""
    metric, us = functions["LP_" + name[4:]], functions[name]
    args = example(metric.name)
    converted = []
    for parameter, value in zip(metric.parameters, args, strict=True):
        if isinstance(parameter.kind, Quantity) and value is not OMITTED:
            si = metric.checked.units[parameter.name].to_si(value)
            converted.append(us.checked.units[parameter.name].from_si(si))
        elif parameter.is_table and isinstance(value, list):
            here, there = metric.checked.units[parameter.name], us.checked.units[parameter.name]
            converted.append([[there.from_si(here.to_si(cell)) for cell in row] for row in value])
        else:
            converted.append(value)
    expected, got = call(metric.name, args), call(name, converted)
    if isinstance(expected, float):
        expected = us.checked.unit.from_si(metric.checked.unit.to_si(expected))
        assert got == pytest.approx(expected, rel=1e-9, abs=1e-12)
    else:
        assert got == expected


@pytest.mark.parametrize("bare", sorted(declarations))
def test_a_twin_exists_exactly_where_units_do_not_cancel(bare: str) -> None:
    """Scaling every dimension by its own factor changes nothing but the scale of the answer, or there is a twin."""
    declaration = declarations[bare]
    has_twin = f"LPU_{bare}" in functions
    assert has_twin is not declaration.any_unit
    if has_twin:
        return
    function, args = functions[f"LP_{bare}"], example(f"LP_{bare}")
    factors: dict[str, float] = {}
    scaled = []
    for parameter, value in zip(function.parameters, args, strict=True):
        kind = parameter.kind
        if isinstance(kind, Quantity) and kind.dimension in ("pressure", "size", "coefficient", "flow", "density"):
            factor = factors.setdefault(kind.dimension, 1.7 + 0.3 * len(factors))
            scaled.append(value if value is OMITTED else value * factor)
        elif parameter.is_table and isinstance(value, list) and "coefficient" in factors and len(value[0]) == 2:
            scaled.append([[travel, c * factors["coefficient"]] for travel, c in value])
        else:
            scaled.append(value)
    expected, got = call(function.name, args), call(function.name, scaled)
    if isinstance(expected, float):
        assert isinstance(declaration.returns, Quantity)
        assert got == pytest.approx(expected * factors.get(declaration.returns.dimension, 1.0), rel=1e-9)
    elif declaration.column:
        assert [x for [x] in got] == pytest.approx([x * factors["pressure"] for [x] in expected], rel=1e-9)
    else:
        assert got == expected


@pytest.mark.parametrize("name", names())
def test_python_call_by_keyword_broadcasts(name: str) -> None:
    function = functions[name]
    given = {p.name: a for p, a in zip(function.parameters, example(name), strict=True) if a is not OMITTED}
    one = function(**given)
    for parameter in function.parameters:
        if parameter.is_table or parameter.name not in given:
            continue
        stacked = {**given, parameter.name: np.array([given[parameter.name]] * 3)}
        assert [plain(x) for x in function(**stacked)] == [plain(one)] * 3
        cube = {**given, parameter.name: np.full((2, 1, 2), given[parameter.name], object)}
        assert function(**cube).shape == (2, 1, 2, *np.shape(one))
        assert str(function.why(**stacked)[0]) == str(function.why(**given))


@pytest.mark.parametrize("name", names())
def test_no_warnings_on_wild_numbers(name: str) -> None:
    """Extreme but possible values never raise and never warn (warnings are errors here)."""
    function = functions[name]
    for extreme in (1e-300, 1e-9, 1e9, 1e300):
        args = [
            extreme if isinstance(p.kind, Quantity) else a
            for p, a in zip(function.parameters, example(name), strict=True)
        ]
        assert isinstance(call(name, args), float | str | CellError | list)
        assert isinstance(reason(name, args), str)


@pytest.mark.parametrize("rows", [1, 3])
def test_an_answer_beyond_all_numbers_is_num(rows: int) -> None:
    args = [[1e308] * rows, [1e-300] * rows]
    assert call_many("LP_MARGIN", args, rows) == [CellError.NUM] * rows
    assert call("LP_MARGIN", [1e308, 1e-300]) is CellError.NUM
    assert "too large for a cell" in reason("LP_MARGIN", [1e308, 1e-300])
    assert math.isnan(functions["LP_MARGIN"](1e308, 1e-300))


@pytest.mark.parametrize("bare", sorted(declarations))
def test_documentation_is_complete(bare: str) -> None:
    declaration = declarations[bare]
    text = inspect.cleandoc(declaration.kernel.__doc__ or "")
    assert len(text.splitlines()) >= 3, "a docstring tells equation, limits and what lies outside"
    assert declaration.gives[0].islower() or declaration.gives[:2].isupper()
    for parameter in declaration.parameters:
        assert parameter.kind.meaning
        assert len(parameter.kind.meaning) <= 255, "the wizards of spreadsheets cut longer texts"


def test_names_are_unique_without_case() -> None:
    folded = [name.casefold() for name in functions]
    assert len(set(folded)) == len(folded)
    assert not [name for name in functions if re.fullmatch(r"[A-Z]{1,3}\d+", name)]


def test_product_functions_are_all_there() -> None:
    """The names and argument orders that are promised to users."""
    from registry_cases import PROMISED

    for name, order in PROMISED.items():
        got = [p.name if p.required else f"[{p.name}]" for p in functions[name].parameters]
        assert got == order, name


def _columns(name: str, rows: list[list[object]]) -> list[object]:
    parameters = functions[name].parameters
    return [Same(rows[0][i]) if p.is_table else [row[i] for row in rows] for i, p in enumerate(parameters)]


def test_numbers_helper_moves_every_number() -> None:
    """The perturbation used above does change the arguments (a check of the checks)."""
    assert all(numbers(name) == [] or perturbed(name, 2)[0] != perturbed(name, 2)[1] for name in names())


def test_every_listed_word_is_understood() -> None:
    """What `lowpoint functions` lists for a word may be typed as it stands."""
    from lowpoint import reference

    for name in names():
        function = functions[name]
        for parameter in function.parameters:
            if parameter.is_text:
                for word in reference.words_of(function, parameter):
                    assert function.checked.resolver(parameter.name)(word), (name, word)
