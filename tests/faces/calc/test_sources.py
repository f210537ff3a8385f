"""The generated parts: committed texts are those that the registry gives, and the add-in is put together of them."""

from __future__ import annotations

import io
import subprocess
import sys
import zipfile
from pathlib import Path
from xml.etree import ElementTree

from lowpoint import functions
from lowpoint.faces import cli
from lowpoint.faces.calc_addin.bundle import bundle
from lowpoint.faces.calc_addin.signatures import fingerprint, methods
from lowpoint.faces.calc_addin.texts import component_list, sources
from lowpoint.faces.calc_addin.typelib import MANY, Method, type_library

COMMITTED = Path(__file__).parents[3] / "addin" / "calc"


def test_committed_sources_are_not_stale(tmp_path: Path) -> None:
    """After a change of the registry: ``lowpoint calc sources addin/calc``."""
    assert cli.main(["calc", "sources", str(tmp_path)]) == 0
    made = {path.name: path.read_text(encoding="utf-8") for path in tmp_path.iterdir()}
    committed = {
        path.name: path.read_text(encoding="utf-8") for path in COMMITTED.iterdir() if path.name != "README.md"
    }
    assert sorted(made) == sorted(committed)
    stale = [name for name, text in made.items() if committed[name] != text]
    assert not stale, "run 'lowpoint calc sources addin/calc'"


def test_the_texts_do_not_depend_on_the_order_of_imports() -> None:
    code = (
        "import lowpoint.physics.stages, lowpoint.physics.noise\n"
        "from lowpoint.faces.calc_addin.bundle import bundle\nimport hashlib\n"
        "print(hashlib.sha256(bundle()).hexdigest())"
    )
    import hashlib

    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == hashlib.sha256(bundle()).hexdigest()


def test_every_part_of_the_manifest_is_there_and_well_formed() -> None:
    with zipfile.ZipFile(io.BytesIO(bundle())) as archive:
        names = archive.namelist()
        for path, _ in component_list():
            assert path in names
        for name in names:
            if name.endswith((".xml", ".xcu")):
                ElementTree.fromstring(archive.read(name))
            elif name.endswith(".py"):
                compile(archive.read(name), name, "exec")
        assert names[0] == "META-INF/manifest.xml"
        assert {i.date_time for i in archive.infolist()} == {(1980, 1, 1, 0, 0, 0)}


def test_the_interface_has_every_function_and_argument() -> None:
    text = sources()["XFunctions.idl"]
    for name, function in functions.items():
        method = name.removeprefix("LP_")
        line = next(line for line in text.splitlines() if f" {method}(" in line)
        assert line.count("[in]") == len(function.parameters)
        for parameter in function.parameters:
            assert f" {parameter.name}" in line


def test_the_type_library_by_hand() -> None:
    """The smallest library, byte by byte: one method ``any F([in] any a)`` in ``m.I`` (the layout, from memory)."""
    library = type_library(("m",), "I", [Method("F", (("a", "any"), ("b", MANY)))])
    assert library.startswith(b"UNOIDL\xff\0")
    root, count = (int.from_bytes(library[at : at + 4], "little") for at in (8, 12))
    assert count == 1
    name, payload = (int.from_bytes(library[at : at + 4], "little") for at in (root, root + 4))
    assert library[name : name + 2] == b"m\0"
    assert library[payload] == 0  # a module
    assert int.from_bytes(library[payload + 1 : payload + 5], "little") == 1
    inner, body = (int.from_bytes(library[at : at + 4], "little") for at in (payload + 5, payload + 9))
    assert library[inner : inner + 2] == b"I\0"
    assert library[body] == 5  # an interface
    assert b"[]any" in library
    assert library.count(b"com.sun.star.uno.XInterface") == 1


def test_the_fingerprint_is_about_names_and_arguments() -> None:
    assert len(fingerprint()) == 16
    assert len(methods()) == len(functions)
    assert len({method.name.casefold() for method in methods()}) == len(functions)
