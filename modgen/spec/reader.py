"""From one YAML page to a :class:`~modgen.spec.model.Spec`: every default resolved, every problem named."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

from modgen.documents import Fields, Node, parse_yaml, read_yaml
from modgen.problems import InputError, Place, Problem
from modgen.spec import checks, values
from modgen.spec.elsewhere import misplaced
from modgen.spec.keys import Key, keys_of, page_name
from modgen.spec.model import (
    Accuracy,
    Build,
    Glide,
    Jacks,
    Order,
    Output,
    Rails,
    Signal,
    Spec,
    Waiver,
)

#: largest page that is read [byte]; one made by hand has a few hundred
LARGEST = 100_000

_SECTIONS: dict[str, type] = {
    "rails": Rails,
    "glide": Glide,
    "signal": Signal,
    "accuracy": Accuracy,
    "output": Output,
    "build": Build,
    "order": Order,
}


def read_spec(path: Path | str) -> Spec:
    """Read a spec from a YAML file.

    Parameters
    ----------
    path : Path or str
        The file; its name stands in messages as it is given here.

    Returns
    -------
    Spec
        In base SI units, with every default resolved.

    Raises
    ------
    InputError
        With every problem of the page, in its order.
    """
    path = Path(path)
    return spec_of(read_yaml(path, what="spec", limit=LARGEST))


def parse_spec(data: bytes | str, file: str = "spec.yaml") -> Spec:
    """Read a spec from text; ``file`` is the name that stands in messages.

    Raises
    ------
    InputError
        With every problem of the page, in its order.
    """
    raw = data.encode("utf-8", "surrogatepass") if isinstance(data, str) else data
    return spec_of(parse_yaml(raw, file, what="spec"))


def spec_of(page: Node) -> Spec:
    """The spec that a page says.

    Raises
    ------
    InputError
        With every problem of the page, in its order.
    """
    reader = _Reader(page)
    spec = reader.spec()
    if spec is None or reader.problems:
        raise InputError(reader.problems)
    return spec


class _Reader:
    """Reads one page; a value that cannot be used is None, and its problem is kept."""

    def __init__(self, page: Node) -> None:
        self.page = page
        self.problems: list[Problem] = []
        self.places: list[tuple[str, Place]] = []
        self.pitch = False
        self.span = 10.0

    def spec(self) -> Spec | None:
        """The whole page, or None when there is a problem."""
        if self.page.kind != "mapping":
            example = ", ".join(f"{page_name(n, k)}: ..." for n, k in keys_of(Spec) if k.required)
            Fields(self.page, self.problems, "", example)
            return None
        read = self._section(Spec, self.page, "")
        if self.problems:
            return None
        sections = {name: self._built(model, read[name]) for name, model in _SECTIONS.items()}
        return Spec(**{**read, **sections}, file=self.page.place.file, places=tuple(self.places))

    def _built(self, model: type, read: dict[str, Any]) -> Any:
        """A section from what was read; the span is one key and two fields."""
        if model is Signal:
            low, high = read["low"]
            read = {**read, "low": low, "high": high}
        return model(**read)

    def _section(self, model: type, node: Node, where: str, example: str = "") -> dict[str, Any]:
        """Every key of a section, read or left at its default."""
        fields = Fields(node, self.problems, where, example)
        read: dict[str, Any] = {}
        if node.kind != "mapping":
            return dict.fromkeys((name for name, _ in keys_of(model)), None)
        for name, key in keys_of(model):
            word = page_name(name, key)
            full = f"{where}.{word}" if where else word
            stated = fields.take(word)
            if stated is not None:
                self.places.append((full, fields.place(word)))
                read[name] = self._value(stated, full, key, read)
            elif key.required:
                self._missing(node, full, word, key)
                read[name] = None
            else:
                read[name] = self._default(full, key, read)
            self._after(node, full, read)
        fields.rest(elsewhere=lambda name: misplaced(name, where))
        return read

    def _missing(self, node: Node, full: str, word: str, key: Key) -> None:
        self.problems.append(
            node.problem(
                f"the key '{full}' is missing",
                f"{full}: {key.help}; it has no default",
                f"add {word}: {key.example}",
            )
        )

    def _default(self, full: str, key: Key, read: dict[str, Any]) -> Any:
        """What holds when the page does not state a key: its default text, read like any other."""
        if key.kind == "section":
            assert key.section is not None
            return self._section(key.section, Node("mapping", self.page.place), full)
        if key.kind in ("waivers", "parts", "paths"):
            return ()
        text = key.pitch_default if self.pitch and key.pitch_default else key.default
        return self._value(Node("scalar", self.page.place, text), full, key, read)

    def _value(self, node: Node, full: str, key: Key, read: dict[str, Any]) -> Any:
        """One value of the page, or None when it cannot be used."""
        try:
            if key.kind == "section":
                assert key.section is not None
                self._not_blank(node, full, key)
                return self._section(key.section, node, full, f"{full}: {key.example}")
            if key.kind == "jacks":
                return self._jacks(node, full, key, read.get("channels"))
            if key.kind == "waivers":
                return self._waivers(node, full, key)
            if key.kind == "offset":
                return values.offset(node, full, key, self.span)
            if full.startswith("rails."):
                return self._rail(node, full, key)
            if key.kind == "paths":
                items = node.items if node.kind == "sequence" else (node,)
                self.places.extend((f"{full}[{number}]", item.place) for number, item in enumerate(items, 1))
            return values.read_value(node, full, key)
        except values.RefusedError as refused:
            self.problems.extend(refused.problems)
            return None

    def _not_blank(self, node: Node, full: str, key: Key) -> None:
        if node.blank:
            remedy = f"write it like this: {full}: {key.example}"
            raise values.refuse(
                node,
                f"{full} has no value",
                f"{full}: {key.says}",
                remedy if key.required else f"{remedy}; or remove the line",
            )

    def _rail(self, node: Node, full: str, key: Key) -> float:
        """A supply; the wrong sign has a message of its own, before the bounds."""
        value = values.quantity(node, full, replace(key, least=None, most=None))
        problem = checks.rail_sign(node, full, value)
        if problem:
            raise values.RefusedError(problem)
        return values.bounded(node, full, key, value)

    def _jacks(self, node: Node, full: str, key: Key, channels: int | None) -> Jacks | None:
        """The total, or inputs and outputs."""
        if node.kind == "mapping":
            before = len(self.problems)
            stated = self._section(Jacks, node, full)
            if channels is not None:
                self.problems.extend(checks.jacks(node, stated, channels))
            return Jacks(**stated) if len(self.problems) == before else None
        if node.kind == "sequence":
            raise values.refuse(
                node,
                f"{full} is a list, neither a number nor a mapping",
                f"{full}: {key.says}",
                f"write {full}: {key.example}",
            )
        total = values.number(node, full, key)
        if channels is None:
            values.bounded(node, full, key, total)
            return None
        found = checks.split_jacks(node, total, channels)
        if isinstance(found, Problem):
            raise values.RefusedError(found)
        return found

    def _waivers(self, node: Node, full: str, key: Key) -> tuple[Waiver, ...]:
        """A list of waivers, each complete."""
        if node.kind != "sequence":
            raise values.refuse(
                node,
                f"{full} is {node}, not a list",
                f"{full}: {key.says}",
                f"write it like this: {full}: {key.example}",
            )
        if len(node.items) > values.LONGEST_LIST:
            raise values.refuse(
                node, f"{full} has {len(node.items)} entries", f"at most {values.LONGEST_LIST} are read", "shorten it"
            )
        found = []
        for number, item in enumerate(node.items, 1):
            each = f"{full}[{number}]"
            self.places.append((each, item.place))
            read = self._section(Waiver, item, each, key.example[1:-1])
            found.append(Waiver(**read, place=item.place))
        return tuple(found)

    def _after(self, node: Node, full: str, read: dict[str, Any]) -> None:
        """Checks between keys, as soon as the last key they look at has been read."""
        if full == "signal.span" and read["low"] is not None:
            self.span = read["low"][1] - read["low"][0]
        elif full == "signal.pitch":
            self.pitch = bool(read["pitch"])
        elif full == "glide.taper":
            self.problems.extend(checks.glide(node, read))
        elif full == "signal" and read["signal"] is not None:
            self.problems.extend(checks.signal(node, read["signal"], read["rails"]))
        elif full == "output" and read["output"] and read["channels"] is not None and read["jacks"]:
            self.problems.extend(checks.protection(node, read["output"], read["channels"], read["jacks"]))
