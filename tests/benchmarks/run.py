"""The benchmark command: ``python tests/benchmarks/run.py [--json FILE] [--quick]``.

Every figure is a ratio of two things measured in this one run (machines are noisy), or a count a row. It prints a
table with the goal beside each figure, writes ``figures.json`` beside this file and README's table unless told
otherwise, and ends with 1 where a goal is missed. Nothing here is part of the test suite.
"""

from __future__ import annotations

import argparse
import json
import platform
import re
import sys
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path

HERE = Path(__file__).parent
sys.path.insert(0, str(HERE))

import bench_audit  # noqa: E402
import bench_calc  # noqa: E402
import bench_design  # noqa: E402
import bench_fleet  # noqa: E402
import bench_kernels  # noqa: E402
import bench_orifices  # noqa: E402
import bench_recalc  # noqa: E402
import bench_start  # noqa: E402
import bench_survey  # noqa: E402
from figures import Figure  # noqa: E402

SUITES: dict[str, Callable[[bool], Iterator[Figure]]] = {
    "kernels": bench_kernels.figures,
    "orifices": bench_orifices.figures,
    "design": bench_design.figures,
    "recalc": bench_recalc.figures,
    "survey": bench_survey.figures,
    "audit": bench_audit.figures,
    "fleet": bench_fleet.figures,
    "start": bench_start.figures,
    "calc": bench_calc.figures,
}


def _quote(figures: list[Figure]) -> None:
    """Put the figures into README's table."""
    page = HERE.parents[1] / "README.md"
    rows = ["| what | measured | goal |", "|---|---|---|"]
    for figure in figures:
        goal = f"at least {figure.at_least:g}" if figure.at_least is not None else ""
        goal = goal if figure.at_most is None else f"at most {figure.at_most:.3g}"
        rows.append(" | ".join(("| " + figure.name, f"{figure.value:.3g} {figure.unit}".strip(), goal)) + " |")
    table = "<!-- figures -->\n" + "\n".join(rows) + "\n<!-- end of figures -->"
    text = page.read_text(encoding="utf-8")
    text = re.sub(r"<!-- figures -->\n.*?<!-- end of figures -->", lambda _: table, text, flags=re.DOTALL)
    page.write_text(text, encoding="utf-8")


def main() -> int:
    parser = argparse.ArgumentParser(description="Measure Lowpoint against its goals, in ratios.")
    parser.add_argument("--json", type=Path, default=HERE / "figures.json", help="where the figures are written")
    parser.add_argument("--quick", action="store_true", help="smaller sizes: a look, not a measurement")
    parser.add_argument("--only", choices=SUITES, help="one suite")
    options = parser.parse_args()
    found: list[Figure] = []
    for name, suite in SUITES.items():
        if options.only in (None, name):
            for figure in suite(options.quick):
                # The goals are those of the full sizes: a look is not judged by them.
                figure = replace(figure, at_least=None, at_most=None) if options.quick else figure
                found.append(figure)
                print(figure.line(), flush=True)
    if not options.quick and options.only is None:
        record = {"python": platform.python_version(), "machine": platform.machine()}
        data = {"on": record, "figures": [figure.as_data() for figure in found]}
        options.json.write_text(json.dumps(data, indent=2) + "\n", encoding="utf-8")
        if options.json.resolve() == HERE / "figures.json":
            _quote(found)
    return 0 if all(figure.met for figure in found) else 1


if __name__ == "__main__":
    sys.exit(main())
