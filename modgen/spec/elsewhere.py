"""Keys that stand in the wrong section of the page: where each belongs."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache

from modgen.documents import Node, nearest, shown
from modgen.problems import Problem
from modgen.spec.keys import Key, keys_of, page_name
from modgen.spec.model import Spec


def misplaced(node: Node, where: str) -> Problem | None:
    """The problem of a key that is known, though not in the section it stands in.

    Parameters
    ----------
    node : Node
        The key as it stands on the page; it is none of the section's own.
    where : str
        The section: ``rails``, ``waive[1]``; empty for the page itself.

    Returns
    -------
    Problem or None
        None when no section has such a key.
    """
    here = where.partition("[")[0]
    section, _, word = node.text.rpartition(".")
    if section and any(home == section and name == word for home, name, _ in _everywhere()):
        return node.problem(
            f"unknown key '{shown(node.text)}'" + (f" in {where}" if where else ""),
            "a section holds its keys: their names are not joined on the page",
            f"put '{word}' under {section}:" if section != here else f"write '{word}'",
        )
    homes = [(home, key) for home, name, key in _everywhere() if name == node.text and home != here]
    if homes:
        home, key = homes[0]
        return node.problem(
            f"'{node.text}' is a key of {_called(home)}, not of {_called(here)}",
            f"{home}.{node.text}: {key.says}" if home else f"{node.text}: {key.says}",
            _put(home, where),
        )
    own = [name for home, name, _ in _everywhere() if home == here]
    near = nearest(node.text, [*own, *(name for _, name, _ in _everywhere())])
    if not near or near in own:
        return None
    home = next(home for home, name, _ in _everywhere() if name == near and home != here)
    return node.problem(
        f"unknown key '{shown(node.text)}'" + (f" in {where}" if where else ""),
        f"known here: {', '.join(own)}",
        f"did you mean '{near}'? Then {_put(home, where)}",
    )


def _called(section: str) -> str:
    """A section as messages name it."""
    return section or "the page itself"


def _put(home: str, where: str) -> str:
    """Where a key belongs, seen from the section it stands in."""
    if not home:
        return f"put it outside of {where}, in the first column"
    return "put it in an entry of the list waive:" if home == "waive" else f"put it under {home}:"


@cache
def _everywhere() -> tuple[tuple[str, str, Key], ...]:
    """Every key of the page: its section (empty for the page itself), its word and its definition."""
    return tuple(_all_keys())


def _all_keys() -> Iterator[tuple[str, str, Key]]:
    for name, key in keys_of(Spec):
        word = page_name(name, key)
        yield "", word, key
        for inner_name, inner in keys_of(key.section) if key.section else ():
            yield word, page_name(inner_name, inner), inner
