"""A netlist file, read into our frozen netlist.

The file is the S-expression netlist that layout editors exchange: ours, or one that came back from
layout. What it says is taken as it stands; judging it is the business of the rules.
"""

from __future__ import annotations

import os
import stat
from pathlib import Path

from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.order import sorted_nets, sorted_parts
from modgen.netlist.sexp import Lines, SList, parse
from modgen.problems import InputError, Place, Problem

#: greatest size of a file [byte]; a netlist of 64 channels has 1 MB
LARGEST = 20_000_000
#: parts of one netlist; one of 64 channels has 700
MOST_PARTS = 4_000
#: longest reference, pin number or net name [character]
LONGEST_NAME = 120
#: problems that are reported of one file
MOST_PROBLEMS = 50
#: fields that say nothing of their own: written for every part, from what stands elsewhere
REPEATED = frozenset({"Description", "Footprint", "Datasheet", "SKiDL Tag", "SKiDL Line"})

_AGAIN = "write the netlist again from the program that made it"


def read_netlist(path: str | Path) -> Netlist:
    """Read a netlist file.

    Parameters
    ----------
    path
        The file.

    Returns
    -------
    Netlist
        Parts sorted by reference class and number, nets by name.

    Raises
    ------
    InputError
        When the file cannot be read, is larger than ``LARGEST``, is binary, or is not a whole netlist;
        with the place of each problem.
    """
    name = os.fspath(path)

    def stop(what: str, why: str, fix: str) -> InputError:
        return InputError([Problem(Place(name), what, why, fix)])

    try:
        found = os.stat(name)
        if not stat.S_ISREG(found.st_mode):
            raise stop("this is not a file", "it is a folder or a device", "give the path of the netlist file")
        if found.st_size > LARGEST:
            raise stop(
                f"the file has {found.st_size} bytes, more than {LARGEST}",
                "a netlist of 64 channels has a twentieth of that",
                "check that this is the netlist, not some other file",
            )
        data = Path(name).read_bytes()
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        raise stop(f"the file cannot be read: {reason}", "", "check the path and its permissions") from None
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise stop(
            f"the file is not text: byte {error.start + 1} is not UTF-8",
            "a netlist is a text file",
            "give the S-expression netlist (often called .net) that the layout editor exports",
        ) from None
    return parse_netlist(text, name)


def parse_netlist(text: str, file: str = "netlist") -> Netlist:
    """Read the text of a netlist file.

    Parameters
    ----------
    text
        The text.
    file
        What to call it in messages.

    Returns
    -------
    Netlist
        Parts sorted by reference class and number, nets by name. Duplicate references are kept.

    Raises
    ------
    InputError
        When the text is not a whole netlist, or contradicts itself.
    """
    if "\0" in text:
        place = Lines(text, file).place(text.index("\0"))
        raise InputError(
            [
                Problem(
                    place,
                    "the file is not text: it holds a zero byte",
                    "a netlist is a text file",
                    "give the S-expression netlist (often called .net) that the layout editor exports",
                )
            ]
        )
    text = text.removeprefix("\ufeff")
    lines = Lines(text, file)
    return _Reader(parse(text, lines), lines).netlist()


class _Reader:
    """Takes one file apart; collects what is wrong with it."""

    def __init__(self, root: SList, lines: Lines) -> None:
        self.root = root
        self.lines = lines
        self.problems: list[Problem] = []

    def problem(self, item: SList, what: str, why: str, fix: str = _AGAIN) -> None:
        """Something is wrong at a list."""
        self.problems.append(Problem(self.lines.place(item.at), what, why, fix))

    def netlist(self) -> Netlist:
        """The netlist, or everything that is wrong."""
        sections = {head: self.root.first(head) for head in ("components", "nets")}
        if self.root.head != "export":
            self.problem(
                self.root,
                f"this is not a netlist: it begins with '({self.root.head[:40]}', not '(export'",
                "the file is of some other kind: a board, a schematic or a library",
                "give the S-expression netlist (often called .net) that the layout editor exports",
            )
            raise InputError(self.problems)
        for head, section in sections.items():
            if section is None:
                self.problem(self.root, f"the netlist has no ({head} ...)", "parts and nets are both needed")
        components, nets = sections["components"], sections["nets"]
        if components is None or nets is None:
            raise InputError(self.problems)
        count = sum(1 for _ in components.lists("comp"))
        if count > MOST_PARTS:
            self.problem(
                components,
                f"the netlist has {count} parts, more than {MOST_PARTS}",
                "one of 64 channels has 700",
                "check that this is the netlist, not some other file",
            )
            raise InputError(self.problems)
        pins = self._library_pins()
        parts = [part for comp in components.lists("comp") if (part := self._part(comp, pins))]
        if not parts and not self.problems:
            self.problem(components, "the netlist has no parts", "there is nothing to look at")
        connected = self._nets(nets, {part.ref for part in parts})
        if self.problems:
            shown = sorted(self.problems)
            if len(shown) > MOST_PROBLEMS:
                more = len(shown) - MOST_PROBLEMS
                what = f"{more} more problems from here on are not listed"
                shown[MOST_PROBLEMS:] = [Problem(shown[MOST_PROBLEMS].place, what, "", _AGAIN)]
            raise InputError(shown)
        return Netlist(self._title(), sorted_parts(parts), sorted_nets(connected))

    def _name(self, item: SList, head: str, whole: str) -> str:
        """A reference, pin number or net name that must be there."""
        text = item.text(head)
        if not text:
            self.problem(item, f"{whole} has no ({head} ...)", "without it nothing can be said of it")
        elif not text.isprintable() or len(text) > LONGEST_NAME:
            what = f"{whole} is called {text[:40]!r}"
            self.problem(item, what, f"a name has up to {LONGEST_NAME} printable characters")
            return ""
        return text

    def _title(self) -> str:
        """The title of the top sheet, or the first there is."""
        design = self.root.first("design")
        if design is None:
            return ""
        titles = []
        for sheet in design.lists("sheet"):
            block = sheet.first("title_block")
            titles.append((sheet.text("name") != "/", block.text("title") if block else ""))
        return next((title for _, title in sorted(titles, key=lambda found: found[0]) if title), "")

    def _library_pins(self) -> dict[tuple[str, str], tuple[str, ...]]:
        """Pin numbers by library and part, where the file has them."""
        out = {}
        section = self.root.first("libparts")
        for found in section.lists("libpart") if section else ():
            pins = found.first("pins")
            numbers = tuple(pin.text("num") for pin in pins.lists("pin")) if pins else ()
            out[found.text("lib"), found.text("part")] = numbers
        return out

    def _part(self, comp: SList, pins: dict[tuple[str, str], tuple[str, ...]]) -> Part | None:
        """One part."""
        ref = self._name(comp, "ref", "a part")
        if not ref:
            return None
        source, path = comp.first("libsource"), comp.first("sheetpath")
        fields: dict[str, str] = {}
        section = comp.first("fields")
        for field in section.lists("field") if section else ():
            name, text = field.text("name"), field.word()
            if name and text and name not in REPEATED:
                fields.setdefault(name, text)
        return Part(
            ref=ref,
            value=comp.text("value"),
            land_pattern=comp.text("footprint"),
            fields=tuple(sorted(fields.items())),
            sheet=(path.text("names") if path else "") or "/",
            pins=pins.get((source.text("lib"), source.text("part")), ()) if source else (),
        )

    def _nets(self, section: SList, refs: set[str]) -> list[Net]:
        """The nets; a pin is on one net, a net stands once, and its parts are listed."""
        out: dict[str, Net] = {}
        where: dict[tuple[str, str], str] = {}
        for net in section.lists("net"):
            name = self._name(net, "name", "a net")
            if not name:
                continue
            if name in out:
                self.problem(net, f"net {name} stands twice", "what is on it cannot be told")
                continue
            pins = []
            for node in net.lists("node"):
                ref, pin = (
                    self._name(node, "ref", f"a node of net {name}"),
                    self._name(node, "pin", f"a node of net {name}"),
                )
                if not ref or not pin:
                    continue
                if ref not in refs:
                    self.problem(node, f"net {name} names {ref}, which is not among the parts", "a part is missing")
                elif (ref, pin) in where:
                    other = where[ref, pin]
                    twice = f"twice on net {name}" if other == name else f"on net {other} and on net {name}"
                    self.problem(node, f"{ref} pin {pin} is {twice}", "a pin is on one net")
                else:
                    where[ref, pin] = name
                    pins.append((ref, pin))
            out[name] = Net(name, tuple(pins))
        return list(out.values())
