"""A file that maps computed land-pattern names to those of one's own layout library."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from modgen.documents import read_yaml
from modgen.problems import InputError, Problem


def read_land_patterns(path: Path) -> Mapping[str, str]:
    """Read ``computed name: own name`` pairs.

    Raises
    ------
    InputError
        The file cannot be read, is not a mapping of names, or a name is empty or has characters a netlist cannot hold.
    """
    page = read_yaml(path, what="land-pattern file")
    if page.kind != "mapping":
        raise InputError(
            [
                Problem(
                    page.place,
                    f"a {page.kind} where names were expected",
                    "",
                    "write lines like 'RESC2012X60N: my-0805'",
                )
            ]
        )
    problems: list[Problem] = []
    names: dict[str, str] = {}
    for key, value in page.entries:
        if value.kind != "scalar" or not value.text.strip():
            problems.append(
                Problem(value.place, f"no name for {key.text}", "", "write the layout library's name after it")
            )
        elif "\\" in value.text or any(ord(c) < 32 for c in value.text):
            problems.append(
                Problem(
                    value.place,
                    f"the name {value.text!r} holds a backslash or a control character",
                    "a netlist cannot carry it",
                    "leave it out",
                )
            )
        else:
            names[key.text] = value.text.strip()
    if problems:
        raise InputError(problems)
    return names
