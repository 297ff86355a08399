"""One YAML file, read safely into nodes that know where they stand.

Scalars keep the text that was written: the reader of a field decides what it means, so that YAML 1.1
cannot turn ``NO`` into false, ``12:30`` into 750 or ``1e3`` into text. What makes a page ambiguous or
explosive (duplicate keys, anchors, aliases, merge keys, type tags, deep nesting) is refused.
"""

from __future__ import annotations

import difflib
import re
import stat
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import yaml

from modgen.problems import InputError, Place, Problem

#: collections inside collections; a page made by hand needs four
DEEPEST = 20
#: longest piece of the user's text that a message repeats
SHOWN = 60
#: unknown keys that are reported one by one in one mapping
UNKNOWN_SHOWN = 20

_LOADER: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
# YAML 1.2, production 1 (c-printable), without the byte order mark
_UNPRINTABLE = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufefe\uff00-\ufffd\U00010000-\U0010ffff]")
_TAB_INDENT = re.compile(r"^ *\t[ \t]*(?=[^\s])", re.MULTILINE)
_QUOTING_FIX = (
    "put a value that holds ': ' or ' #', or begins with one of [ ] { } , & * ! | > % @ `, in quotes, "
    "and begin all keys of one mapping in the same column"
)


@dataclass(frozen=True)
class Node:
    """A piece of a YAML page and where it begins.

    kind: ``mapping``, ``sequence`` or ``scalar``. text: what a scalar says, as written (escapes and
    folding resolved). plain: false for a quoted or block scalar. items: of a sequence. entries: the
    (key, value) pairs of a mapping in the order of the page; keys are scalars, each different.
    """

    kind: str
    place: Place
    text: str = ""
    plain: bool = True
    items: tuple[Node, ...] = ()
    entries: tuple[tuple[Node, Node], ...] = ()

    @property
    def blank(self) -> bool:
        """Whether nothing was written (``key:`` with nothing after it)."""
        return self.kind == "scalar" and self.plain and not self.text

    def get(self, key: str) -> Node | None:
        """The value of a key of a mapping, or None."""
        return next((value for name, value in self.entries if name.text == key), None)

    def key(self, key: str) -> Node | None:
        """The key itself, for its place, or None."""
        return next((name for name, _ in self.entries if name.text == key), None)

    def keys(self) -> tuple[str, ...]:
        """The keys of a mapping, in the order of the page."""
        return tuple(name.text for name, _ in self.entries)

    def __str__(self) -> str:
        """What was found, for a message: ``'4k7'``, ``a list``, ``a mapping``, ``nothing``."""
        if self.kind == "mapping":
            return "a mapping"
        if self.kind == "sequence":
            return "a list"
        return "nothing" if self.blank else f"'{shown(self.text)}'"

    def problem(self, what: str, why: str = "", fix: str = "", level: str = "error") -> Problem:
        """A problem that stands at this node."""
        return Problem(self.place, what, why, fix, level)


class Fields:
    """The keys of one mapping, taken one by one; what is left over is unknown.

    Parameters
    ----------
    node : Node
        The mapping; anything else is reported at once and read as a mapping without keys.
    problems : list[Problem]
        Shared by everything that reads the page; problems are added to it.
    where : str
        What the mapping is called in messages: ``glide``, ``parts.R-1k``; empty for the whole page.
    example : str
        What a mapping could look like, for the message when there is none.
    """

    def __init__(self, node: Node, problems: list[Problem], where: str = "", example: str = "") -> None:
        self.node = node
        self.problems = problems
        self.where = where
        self._known: list[str] = []
        self._entries = {name.text: (name, value) for name, value in node.entries}
        if node.kind != "mapping":
            subject = where or "the page"
            fix = f"write it like this: {example}" if example else "write it as lines of 'key: value'"
            problems.append(
                node.problem(f"{subject} is {node}, not a mapping", f"{subject} is made of keys and values", fix)
            )

    def take(self, key: str) -> Node | None:
        """The value of a key, or None when the page does not state it; the key counts as known."""
        if key not in self._known:
            self._known.append(key)
        entry = self._entries.get(key)
        return entry[1] if entry else None

    def place(self, key: str) -> Place:
        """Where the key stands; where the mapping begins when the page does not state it."""
        entry = self._entries.get(key)
        return entry[0].place if entry else self.node.place

    def rest(self, known: Iterable[str] = ()) -> None:
        """Report every key that was neither taken nor is in ``known``, with the nearest known one."""
        names = list(dict.fromkeys([*self._known, *known]))
        strangers = [name for text, (name, _) in self._entries.items() if text not in names]
        for name in strangers[:UNKNOWN_SHOWN]:
            self.problems.append(unknown(name, names, "key", self.where))
        if len(strangers) > UNKNOWN_SHOWN:
            self.problems.append(
                strangers[UNKNOWN_SHOWN].problem(
                    f"{len(strangers) - UNKNOWN_SHOWN} more unknown keys in {self.where or 'the page'}",
                    "",
                    "mend the ones above first",
                )
            )


def nearest(word: str, names: Iterable[str]) -> str:
    """The name most like a word, or an empty text when none is near."""
    lower = {name.casefold(): name for name in names}
    found = difflib.get_close_matches(word[:SHOWN].casefold().replace(" ", "_"), lower, 1, 0.6)
    return lower[found[0]] if found else ""


def unknown(node: Node, names: Iterable[str], subject: str, where: str = "") -> Problem:
    """The problem for a scalar that is none of ``names``; ``subject`` says what it ought to be.

    The wording is ``unknown <subject> '<text>' in <where>``, then every known name, then the nearest one.
    """
    known = list(names)
    near = nearest(node.text, known)
    return node.problem(
        f"unknown {subject} '{shown(node.text)}'" + (f" in {where}" if where else ""),
        f"known here: {', '.join(known)}" if known else "no names are known here",
        f"did you mean '{near}'?" if near else "use one of the known names",
    )


def shown(text: str) -> str:
    """The user's text as a message repeats it: one line, nothing invisible, at most 60 characters."""
    cut = text if len(text) <= SHOWN else text[: SHOWN - 1] + "…"
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in cut)


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


def read_bytes(path: Path, *, what: str, limit: int, form: str = "YAML") -> bytes:
    """The bytes of a regular file that is not larger than ``limit`` [byte]; ``form`` is how it is written.

    Raises
    ------
    InputError
        When it is missing, not a regular file, unreadable or too large.
    """
    file = shown_path(path)

    def refuse(text: str, why: str, fix: str) -> InputError:
        return InputError([Problem(Place(file), text, why, fix)])

    try:
        state = path.stat()
        if stat.S_ISDIR(state.st_mode):
            raise refuse(f"this is a folder, not a {what}", f"a {what} is one {form} file", "name the file")
        if not stat.S_ISREG(state.st_mode):
            # a device or a pipe can be endless, or wait for ever
            raise refuse(f"this is not a regular file, so no {what}", "devices and pipes are not read", "name a file")
        size = state.st_size
        data = b""
        if size <= limit:
            with path.open("rb") as stream:
                data = stream.read(limit + 1)
            size = max(size, len(data))  # some files say 0 and are not empty
    except FileNotFoundError:
        raise refuse(f"this {what} cannot be found", "there is no such file", "check the path") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        fix = "check the path and its permissions"
        raise refuse(f"this {what} cannot be read", f"the system says: {reason}", fix) from None
    if size > limit:
        raise refuse(
            f"this {what} is too large: {size} bytes or more"
            if size == limit + 1
            else f"this {what} is too large: {size} bytes",
            f"at most {limit} bytes are read",
            f"check that this file is a {what}",
        )
    return data


def shown_path(path: Path) -> str:
    """A path as messages name it; bytes that are no text are escaped so that it can always be printed."""
    return str(path).encode("utf-8", "backslashreplace").decode("utf-8")


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
            self._syntax(error)
        except (yaml.YAMLError, ValueError, OverflowError) as error:
            # the pure Python scanner converts escapes with chr(), which has limits of its own
            self._report(Place(self.file, 1, 1), f"this is not valid YAML: {shown(str(error))}", "", _QUOTING_FIX)
        return self._top

    def _syntax(self, error: yaml.MarkedYAMLError) -> None:
        """Report what the scanner or the parser could not take."""
        place = self._place(error.problem_mark or error.context_mark)
        if "nesting depth" in str(error.problem):  # libyaml's own bound, met while it looks ahead
            self._too_deep(place)
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
