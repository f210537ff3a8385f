"""Coverage-guided fuzzing of one target: ``python tests/fuzz/run.py TARGET [options of libFuzzer]`` (see README.md)."""

from __future__ import annotations

import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent


def main() -> None:
    """Fuzz until it is stopped; a failing input is written where libFuzzer's ``-artifact_prefix`` says."""
    import atheris

    sys.path.insert(0, str(HERE.parent))
    with atheris.instrument_imports(include=["lowpoint", "fuzz"]):
        from fuzz.targets import TARGETS
    if len(sys.argv) < 2 or sys.argv[1] not in TARGETS:
        sys.exit(f"name a target: {', '.join(TARGETS)}")
    name = sys.argv.pop(1)
    atheris.Setup(sys.argv, TARGETS[name])
    atheris.Fuzz()


if __name__ == "__main__":
    main()
