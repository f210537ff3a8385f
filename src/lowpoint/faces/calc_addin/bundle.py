"""The add-in as one file: the generated texts, the type library and the parts that run in the office."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Mapping
from importlib.resources import files
from pathlib import Path

from lowpoint import __version__
from lowpoint.faces.calc_addin.signatures import INTERFACE, MODULES, fingerprint, methods, signatures
from lowpoint.faces.calc_addin.texts import FUNCTIONS_PART, JOB_PART, LIBRARY, sources
from lowpoint.faces.calc_addin.typelib import type_library

__all__ = ["bundle", "write_sources"]

_INSIDE = "pythonpath/lowpoint_office/"
"""The office adds a folder `pythonpath` beside a component to the places where Python looks."""
_LONG_AGO = (1980, 1, 1, 0, 0, 0)


def bundle() -> bytes:
    """The bytes of the extension; equal registries of one version give equal bytes.

    Nothing is compressed: what a compressor gives depends on its version.
    """
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w", zipfile.ZIP_STORED) as archive:
        for name, content in sorted(_parts().items(), key=lambda item: (item[0] != "META-INF/manifest.xml", item[0])):
            member = zipfile.ZipInfo(name, _LONG_AGO)
            member.external_attr = 0o644 << 16
            member.create_system = 3  # the same on every system, so that the bytes are
            archive.writestr(member, content)
    return sink.getvalue()


def write_sources(folder: Path) -> list[Path]:
    """Write the generated texts into ``folder``, for reading and for the test that says when they are stale."""
    written = []
    for name, text in sources().items():
        path = folder / Path(name).name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8", newline="\n")
        written.append(path)
    return written


def _parts() -> Mapping[str, bytes]:
    parts = {name: text.encode() for name, text in sources().items() if not name.endswith(".idl")}
    parts[LIBRARY] = type_library(MODULES, INTERFACE, methods())
    here = files(__package__)
    for name in (FUNCTIONS_PART, JOB_PART):
        parts[name] = (here / "components" / name).read_bytes()
    for item in (here / "inside").iterdir():
        if item.name.endswith(".py"):
            parts[_INSIDE + item.name] = item.read_bytes()
    parts[_INSIDE + "generated.py"] = _generated().encode()
    return {name: content.replace(b"\r\n", b"\n") if name != LIBRARY else content for name, content in parts.items()}


def _generated() -> str:
    """What the parts in the office must know of the registry that the add-in was made from."""
    table = "".join(f'    "{one.method}": "{one.name}",\n' for one in signatures())
    return (
        '"""Made by `lowpoint calc build`; do not edit."""\n\n'
        f'VERSION = "{__version__}"\nFINGERPRINT = "{fingerprint()}"\nMETHODS = {{\n{table}}}\n'
    )
