"""A file that maps computed land-pattern names to those of one's own layout library."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from pathlib import Path

from modgen.documents import Node, nearest, read_yaml
from modgen.problems import InputError


def read_land_patterns(path: Path, known: Collection[str] | None) -> Mapping[str, str]:
    """Read ``computed name: own name`` pairs.

    Parameters
    ----------
    path : Path
        The file. [-]
    known : collection of str or None
        Land patterns of the catalogue: a name that none of its parts has would map nothing; None when there is
        no catalogue to know them. [-]

    Raises
    ------
    InputError
        The file cannot be read, is not a mapping, names a land pattern that no part has, or gives a name
        that is empty or that a netlist cannot hold.
    """
    page = read_yaml(path, what="land-pattern file")
    if page.kind != "mapping":
        what = f"{page} where names were expected"
        raise InputError([page.problem(what, "", "write lines like 'RESC2012X60N: my-0805'")])
    problems = []
    names: dict[str, str] = {}
    for key, value in page.entries:
        if known is not None and key.text not in known:
            near = nearest(key.text, sorted(known))
            fix = f"did you mean '{near}'?" if near else "`modgen build` writes each part's name in the netlist"
            problems.append(key.problem(f"no part in the catalogue has the land pattern '{key.text}'", "", fix))
        fault = _fault(value)
        if fault:
            problems.append(value.problem(f"the name for {key.text} {fault}", "", "write your layout library's name"))
        names[key.text] = value.text.strip()
    if problems:
        raise InputError(problems)
    return names


def _fault(value: Node) -> str:
    if value.kind != "scalar" or not value.text.strip():
        return "is missing"
    if "\\" in value.text or not value.text.isprintable():
        return "holds a backslash or a control character, which a netlist cannot carry"
    return ""
