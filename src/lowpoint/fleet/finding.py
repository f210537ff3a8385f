"""Which books are meant, by names, folders and patterns, and where their outputs go."""

from __future__ import annotations

import glob
import os
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["BOOKS", "Found", "Looking", "check_targets", "find", "marked_in", "output_in", "several"]

BOOKS = (".xlsx", ".xlsm", ".xltx", ".xltm")


@dataclass(frozen=True, slots=True)
class Found:
    """A book, and its place below the folder that was named (just its name where it was named itself)."""

    path: Path
    below: Path


@dataclass(frozen=True, slots=True)
class Looking:
    """What to look for: endings, the mark of our own outputs beside a book, whether sub-folders are opened, and a
    folder of outputs that is no place to look."""

    suffixes: Sequence[str] = BOOKS
    mark: str = ""
    recursive: bool = False
    outputs: Path | None = None

    def wanted(self, path: Path) -> bool:
        """Is it a book of the kind, neither a lock file nor hidden, nor an output of ours beside its source?"""
        plain = path.suffix.lower() in self.suffixes and not path.name.startswith(("~$", "."))
        return plain and not self._own(path) and path.is_file()

    def _own(self, path: Path) -> bool:
        source = path.stem.removesuffix(self.mark) if self.mark else path.stem
        return source != path.stem and any(
            path.with_name(source + suffix).exists()
            or path.with_name(source.removesuffix(_told(suffix)) + suffix).exists()
            for suffix in self.suffixes
        )

    def namesakes(self, path: Path) -> bool:
        """Is there a book of the same name with another ending beside it?"""
        others = (path.with_suffix(suffix) for suffix in self.suffixes if suffix != path.suffix.lower())
        return any(self.wanted(other) for other in others)


def several(given: Sequence[Path]) -> bool:
    """Do the words mean several books, even if only one is found?"""
    return len(given) > 1 or given[0].is_dir() or _is_pattern(given[0])


def find(given: Sequence[Path], looking: Looking) -> list[Found]:
    """The books in the order of the words, each folder's sorted, none twice; LowpointError where there is none."""
    found: dict[str, Found] = {}
    for word in given:
        here = list(_of(word, looking))
        if not here and _is_pattern(word):
            raise _none(word, "must match files", looking)
        for one in here:
            found.setdefault(os.path.realpath(one.path), one)
    if not found:
        raise _none(given[0], "must hold files of the kind", looking)
    return list(found.values())


def _none(word: Path, must: str, looking: Looking) -> LowpointError:
    return LowpointError(str(word), must, "none", f"Looked for {' '.join(looking.suffixes)}.")


def _of(word: Path, looking: Looking) -> Iterator[Found]:
    if word.is_dir():
        yield from _inside(word, looking)
    elif _is_pattern(word):
        # The shell of Windows hands patterns on as they are, and quotation marks keep any other from opening them.
        fixed = _fixed(word) if "**" in word.parts else None
        for name in sorted(glob.glob(str(word), recursive=True)):
            path = Path(name)
            if looking.wanted(path):
                yield Found(path, Path(path.name) if fixed is None else path.relative_to(fixed))
    else:
        yield Found(word, Path(word.name))


def _inside(folder: Path, looking: Looking) -> Iterator[Found]:
    barred = None if looking.outputs is None else os.path.realpath(looking.outputs)
    for at, folders, names in os.walk(folder, onerror=_refused):
        here = Path(at)
        keep = [name for name in sorted(folders) if not name.startswith(".")]
        folders[:] = [name for name in keep if os.path.realpath(here / name) != barred] if looking.recursive else []
        for path in sorted(here / name for name in names):
            if looking.wanted(path):
                yield Found(path, path.relative_to(folder))


def _refused(problem: OSError) -> None:
    name = str(problem.filename)
    raise LowpointError(name, f"the folder cannot be read ({problem.strerror})", remedy="Check its permissions.")


def _is_pattern(word: Path) -> bool:
    """Is it a pattern? A file that bears such a name is meant itself."""
    return glob.has_magic(str(word)) and not word.exists()


def _fixed(pattern: Path) -> Path:
    """The folder of a pattern above its first variable part."""
    steady: list[str] = []
    for part in pattern.parts:
        if glob.has_magic(part):
            break
        steady.append(part)
    return Path(*steady)


def output_in(folder: Path, found: Found, suffix: str | None = None) -> Path:
    """Where the output of a book goes in a folder of outputs: the same place below it, perhaps with another ending."""
    target = folder / found.below
    return target if suffix is None else target.with_suffix(suffix)


def marked_in(folder: Path, found: Found, looking: Looking, suffix: str) -> Path:
    """The same for an output that is of another kind than its source: it bears the mark, and the ending of its source
    where that alone tells it from a namesake: ``offer-audit.xlsx``, ``offer-pdf-audit.xlsx``."""
    path = found.path
    told = _told(path.suffix.lower()) if looking.namesakes(path) else ""
    return folder / found.below.with_name(f"{path.stem}{told}{looking.mark}{suffix}")


def _told(suffix: str) -> str:
    return suffix.replace(".", "-")


def check_targets(pairs: Sequence[tuple[Path, Path]]) -> None:
    """LowpointError where two books would be written to one file, or one over another's source."""
    seen: dict[str, Path] = {}
    sources = {_folded(source): source for source, _ in pairs}
    for source, target in pairs:
        other = seen.setdefault(_folded(target), source)
        if other is not source:
            got = f"{other} and {source} would both be {target}"
            raise LowpointError("-o", "must give every book its own output", got, "Name two folders, in two runs.")
        over = sources.get(_folded(target))
        if over is not None and over is not source:
            got = f"the output of {source} would be written over {over}"
            raise LowpointError("-o", "must not be where other books of the run are", got, "Name another folder.")


def _folded(path: Path) -> str:
    return os.path.realpath(path).casefold()
