"""The texts of the add-in, made from the registry: interface definition, wizard texts, jobs, description, manifest."""

from __future__ import annotations

from collections.abc import Sequence
from xml.sax.saxutils import escape, quoteattr

from lowpoint import __version__
from lowpoint.faces.calc_addin.signatures import INTERFACE, MODULES, RAISES, SERVICE, Signature, signatures

__all__ = ["IDENTIFIER", "JOB_EVENTS", "JOB_SERVICE", "LIBRARY", "component_list", "sources"]

IDENTIFIER = "org.lowpoint.calc"
JOB_SERVICE = "org.lowpoint.PlainNamesJob"
JOB_EVENTS = ("OnLoadFinished", "OnSaveDone", "OnSaveAsDone")
LIBRARY = "lowpoint.rdb"
FUNCTIONS_PART, JOB_PART = "lowpoint_functions.py", "lowpoint_job.py"

_XML = '<?xml version="1.0" encoding="UTF-8"?>'
_REGISTRY = 'xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema"'


def sources() -> dict[str, str]:
    """Every text of the add-in by its place in the package, and the interface definition for those who read it."""
    known = signatures()
    return {
        "META-INF/manifest.xml": _manifest(),
        "description.xml": _description(),
        "CalcAddIns.xcu": _wizard(known),
        "Jobs.xcu": _jobs(),
        "XFunctions.idl": _interface(known),
    }


def component_list() -> tuple[tuple[str, str], ...]:
    """The parts that the office must know, each with its media type; the library first, for the others use it."""
    return (
        (LIBRARY, "application/vnd.sun.star.uno-typelibrary;type=RDB"),
        (FUNCTIONS_PART, "application/vnd.sun.star.uno-component;type=Python"),
        (JOB_PART, "application/vnd.sun.star.uno-component;type=Python"),
        ("CalcAddIns.xcu", "application/vnd.sun.star.configuration-data"),
        ("Jobs.xcu", "application/vnd.sun.star.configuration-data"),
    )


def _manifest() -> str:
    entries = "".join(
        f' <manifest:file-entry manifest:full-path="{path}" manifest:media-type="{kind}"/>\n'
        for path, kind in component_list()
    )
    space = "http://openoffice.org/2001/manifest"
    return f'{_XML}\n<manifest:manifest xmlns:manifest="{space}">\n{entries}</manifest:manifest>\n'


def _description() -> str:
    return f"""{_XML}
<description xmlns="http://openoffice.org/extensions/description/2006" xmlns:xlink="http://www.w3.org/1999/xlink">
 <identifier value="{IDENTIFIER}"/>
 <version value="{__version__}"/>
 <display-name><name lang="en">Lowpoint functions</name></display-name>
 <publisher><name lang="en">The Lowpoint developers</name></publisher>
</description>
"""


def _interface(known: Sequence[Signature]) -> str:
    lines = [f"module {MODULES[0]} {{ module {MODULES[1]} {{", f"interface {INTERFACE} {{"]
    for one in known:
        arguments = ", ".join(f"[in] {argument.kind} {argument.name}" for argument in one.arguments)
        lines += [f"    any {one.method}({arguments})", f"        raises ({RAISES[0].replace('.', '::')});"]
    return "\n".join([*lines, "};", "}; };", ""])


def _value(text: str) -> str:
    return f'<value xml:lang="en">{escape(text)}</value>'


def _wizard(known: Sequence[Signature]) -> str:
    lines = [
        _XML,
        f'<oor:component-data {_REGISTRY} oor:name="CalcAddIns" oor:package="org.openoffice.Office">',
        '<node oor:name="AddInInfo">',
        f'<node oor:name="{SERVICE}" oor:op="replace">',
        '<node oor:name="AddInFunctions">',
    ]
    for one in known:
        lines += _wizard_entry(one)
    return "\n".join([*lines, "</node>", "</node>", "</node>", "</oor:component-data>", ""])


def _wizard_entry(one: Signature) -> list[str]:
    lines = [
        f' <node oor:name="{one.method}" oor:op="replace">',
        f'  <prop oor:name="DisplayName">{_value(one.name)}</prop>',
        f'  <prop oor:name="Description">{_value(one.text)}</prop>',
        '  <prop oor:name="Category"><value>Add-In</value></prop>',
        # The name in files of other programs; without it they would get the service's.
        f'  <prop oor:name="CompatibilityName"><value xml:lang="en-US">{one.name}</value></prop>',
        '  <node oor:name="Parameters">',
    ]
    for argument in one.arguments:
        lines += [
            f'   <node oor:name={quoteattr(argument.name)} oor:op="replace">',
            f'    <prop oor:name="DisplayName">{_value(argument.name)}</prop>',
            f'    <prop oor:name="Description">{_value(argument.text)}</prop>',
            "   </node>",
        ]
    return [*lines, "  </node>", " </node>"]


def _jobs() -> str:
    events = "".join(
        f' <node oor:name="{event}" oor:op="fuse"><node oor:name="JobList">'
        f'<node oor:name="{JOB_SERVICE}" oor:op="replace"/></node></node>\n'
        for event in JOB_EVENTS
    )
    return f"""{_XML}
<oor:component-data {_REGISTRY} oor:name="Jobs" oor:package="org.openoffice.Office">
<node oor:name="Jobs">
 <node oor:name="{JOB_SERVICE}" oor:op="replace">
  <prop oor:name="Service"><value>{JOB_SERVICE}</value></prop>
 </node>
</node>
<node oor:name="Events">
{events}</node>
</oor:component-data>
"""
