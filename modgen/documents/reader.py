"""From the bytes of one YAML document to nodes."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import yaml

from modgen.documents.fields import UNKNOWN_SHOWN
from modgen.documents.files import read_bytes
from modgen.documents.nodes import Node, shown
from modgen.documents.syntax import explain
from modgen.problems import InputError, Place, Problem

#: collections inside collections; a page made by hand needs four
DEEPEST = 20

_LOADER: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
# YAML 1.2, production 1 (c-printable), without the byte order mark
_UNPRINTABLE = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufefe\uff00-\ufffd\U00010000-\U0010ffff]")
_TAB_INDENT = re.compile(r"^ *\t[ \t]*(?=[^\s])", re.MULTILINE)
_QUOTING_FIX = (
    "put a value that holds ': ' or ' #', or begins with one of [ ] { } , & * ! | > % @ `, in quotes, "
    "and begin all keys of one mapping in the same column"
)


def read_yaml(path: Path, *, what: str = "spec", limit: int = 1_000_000) -> Node:
    """Read one YAML document from a file.

    Parameters
    ----------
    path : Path
        The file; its name stands in every place as it is given here.
    what : str
        What the file is, for messages: ``spec``, ``catalogue file``.
    limit : int
        Largest size that is read [byte]. Nothing larger is ever held in memory.

    Returns
    -------
    Node
        The top of the page, any kind.

    Raises
    ------
    InputError
        With every problem of the file as YAML; its meaning is for the caller to judge.
    """
    return parse_yaml(read_bytes(path, what=what, limit=limit), str(path), what=what)


def parse_yaml(data: bytes, file: str, *, what: str = "spec") -> Node:
    """Parse the bytes of one YAML document; ``file`` is the name that stands in every place.

    Raises
    ------
    InputError
        See :func:`read_yaml`.
    """
    file = file.encode("utf-8", "backslashreplace").decode("utf-8")
    text = _decoded(data, file, what)
    problems = [
        Problem(
            _place_in(text, m.start() + m.group().index("\t"), file),
            "this line is indented with a tab",
            "YAML allows only spaces before the first character of a line",
            "replace the tab by spaces",
        )
        for m, _ in zip(_TAB_INDENT.finditer(text), range(UNKNOWN_SHOWN), strict=False)
    ]
    if problems:
        raise InputError(problems)
    top = _Composer(file, what, problems).compose(text)
    if not problems and (top is None or top.blank):
        problems.append(
            Problem(
                Place(file, 1, 1),
                f"this {what} is empty",
                "it holds no keys, only blanks or comments",
                "fill it in",
            )
        )
    if problems or top is None:
        raise InputError(problems)
    return top


def _decoded(data: bytes, file: str, what: str) -> str:
    """The bytes as text, or a problem at the first byte that is no text."""

    def place(position: int) -> Place:
        before = data[:position].decode("utf-8", "replace")
        return Place(file, before.count("\n") + 1, len(before) - before.rfind("\n"))

    zero = data.find(b"\0")
    try:
        text = data.decode("utf-8-sig")
        bad = -1
    except UnicodeDecodeError as error:
        text = ""
        # the byte order mark is not counted by the codec
        bad = error.start + (3 if data.startswith(b"\xef\xbb\xbf") else 0)
    if zero >= 0 and (bad < 0 or zero < bad):
        raise InputError(
            [
                Problem(
                    place(zero),
                    f"this {what} is not text: byte {zero + 1} is zero",
                    "it is a binary file, or text in UTF-16",
                    "save it as UTF-8 text",
                )
            ]
        )
    if bad >= 0:
        raise InputError(
            [
                Problem(
                    place(bad),
                    f"this {what} is not UTF-8 text: byte {bad + 1} is 0x{data[bad]:02X}",
                    "it is a binary file, or text in another encoding",
                    "save it as UTF-8 text",
                )
            ]
        )
    found = _UNPRINTABLE.search(text)
    if found:
        raise InputError(
            [
                Problem(
                    _place_in(text, found.start(), file),
                    f"the control character U+{ord(found.group()):04X} stands in this {what}",
                    "YAML allows only characters that can be seen",
                    "remove it",
                )
            ]
        )
    return text


def _place_in(text: str, index: int, file: str) -> Place:
    """Line and column of a character."""
    before = text[:index]
    return Place(file, before.count("\n") + 1, index - before.rfind("\n"))


class _Composer:
    """Builds nodes from YAML events with a stack of its own, so that no page can exhaust Python's."""

    def __init__(self, file: str, what: str, problems: list[Problem]) -> None:
        self.file = file
        self.what = what
        self.problems = problems
        self._open: list[tuple[str, Place, list[Node]]] = []
        self._top: Node | None = None

    def compose(self, text: str) -> Node | None:
        """The top node, or None when there is none or a problem ended the reading."""
        documents = 0
        try:
            for event in self._events(text):
                place = self._place(event.start_mark)
                if isinstance(event, yaml.DocumentStartEvent):
                    documents += 1
                    if documents > 1:
                        self._report(
                            place,
                            f"a second document begins in this {self.what}",
                            "one file holds one document",
                            "remove the line '---' or make two files",
                        )
                        return self._top
                elif isinstance(event, yaml.AliasEvent):
                    self._report(
                        place,
                        f"the alias '*{shown(event.anchor or '')}' is not allowed",
                        "a page means what it says where it says it; aliases can also grow without bound",
                        "write the value out",
                    )
                    self._add(Node("scalar", place, "?", plain=False))
                elif isinstance(event, yaml.NodeEvent):
                    self._node(event, place)
                elif isinstance(event, yaml.CollectionEndEvent):
                    self._close()
                if len(self._open) > DEEPEST:
                    self._too_deep(place)
                    return None
        except yaml.MarkedYAMLError as error:
            self._syntax(error, text)
        except (yaml.YAMLError, ValueError, OverflowError) as error:
            # the pure Python scanner converts escapes with chr(), which has limits of its own
            self._report(Place(self.file, 1, 1), f"this is not valid YAML: {shown(str(error))}", "", _QUOTING_FIX)
        return self._top

    def _syntax(self, error: yaml.MarkedYAMLError, text: str) -> None:
        """Report what the scanner or the parser could not take, where it begins if that can be told."""
        mark = error.problem_mark or error.context_mark
        place = self._place(mark)
        if "nesting depth" in str(error.problem):  # libyaml's own bound, met while it looks ahead
            self._too_deep(place)
            return
        found = explain(text, self.file, (mark.line, mark.column)) if mark else None
        if found:
            self.problems.append(found)
            return
        said = ", ".join(shown(part) for part in (error.context, error.problem) if part)
        begins = error.context_mark
        why = ""
        if begins and error.problem_mark and begins.line != error.problem_mark.line:
            why = f"what cannot be completed here begins at line {begins.line + 1}, column {begins.column + 1}"
        self._report(place, f"this is not valid YAML: {said}", why, _QUOTING_FIX)

    def _too_deep(self, place: Place) -> None:
        self._report(
            place,
            f"this {self.what} is nested more than {DEEPEST} levels deep",
            "nothing that is read here needs that",
            "check the brackets",
        )

    def _events(self, text: str) -> Iterator[Any]:
        yield from yaml.parse(text, Loader=_LOADER)

    def _place(self, mark: Any) -> Place:
        return Place(self.file, mark.line + 1, mark.column + 1) if mark else Place(self.file, 1, 1)

    def _report(self, place: Place, what: str, why: str, fix: str) -> None:
        self.problems.append(Problem(place, what, why, fix))

    def _node(self, event: Any, place: Place) -> None:
        """Take in the beginning of a collection, or a scalar."""
        if event.anchor:
            self._report(
                place,
                f"the anchor '&{shown(event.anchor)}' is not allowed",
                "a page means what it says where it says it",
                "write the value out where it is used, without the anchor",
            )
        if event.tag:
            self._report(
                place,
                f"the type tag '{shown(event.tag)}' is not allowed",
                "what a value means is decided by its key",
                "remove the tag",
            )
        if isinstance(event, yaml.ScalarEvent):
            found = _UNPRINTABLE.search(event.value)
            if found:
                self._report(
                    place,
                    f"this text holds the control character U+{ord(found.group()):04X}",
                    "it cannot be written to a drawing, a sheet or a netlist",
                    "remove the escape",
                )
            self._add(Node("scalar", place, event.value, plain=not event.style))
        elif isinstance(event, yaml.MappingStartEvent):
            self._open.append(("mapping", place, []))
        else:
            self._open.append(("sequence", place, []))

    def _add(self, node: Node) -> None:
        if self._open:
            self._open[-1][2].append(node)
        else:
            self._top = node

    def _close(self) -> None:
        kind, place, children = self._open.pop()
        if kind == "sequence":
            self._add(Node("sequence", place, items=tuple(children)))
            return
        seen: dict[str, Node] = {}
        entries = []
        for key, value in zip(children[::2], children[1::2], strict=True):
            if key.kind != "scalar":
                self._report(key.place, f"a key is {key}, not text", "keys are words", "write 'key: value'")
            elif key.text == "<<" and key.plain:
                self._report(
                    key.place,
                    "the merge key '<<' is not allowed",
                    "a page means what it says where it says it",
                    "write the keys out",
                )
            elif key.text in seen:
                first = seen[key.text].place
                self._report(
                    key.place,
                    f"the key '{shown(key.text)}' stands twice in one mapping",
                    f"it stands at line {first.line}, column {first.column} already",
                    "remove one of the two",
                )
            else:
                seen[key.text] = key
                entries.append((key, value))
        self._add(Node("mapping", place, entries=tuple(entries)))
