"""Real commands in processes of their own, which are ended with the test whatever happens."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import ExitStack
from pathlib import Path
from typing import Any

import pytest

from fleet.helping import Command, Running


@pytest.fixture
def command(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Command]:
    """Starts ``lowpoint`` with these words."""
    with ExitStack() as stack:

        def start(*words: str | Path, **options: Any) -> Running:
            return stack.enter_context(Running(words, tmp_path_factory.mktemp("said"), **options))

        yield start
