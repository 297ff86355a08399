"""What one key of the page is: the definition that the reader, the schema and the starter page share."""

from __future__ import annotations

from dataclasses import Field, dataclass, fields
from functools import cache
from typing import Any

from modgen.units import format_quantity

#: what stands on a page for "there is no such file"
NONE = "none"

LONGEST_NAME = 60
LONGEST_PATH = 250
LONGEST_REASON = 500


@dataclass(frozen=True)
class Key:
    """One key of the page.

    kind: how it is written and read, one of

    - ``title``, ``name``, ``rule``, ``reason``: text
    - ``path``: a path or ``none``; ``paths``, ``parts``: a text or a list of texts
    - ``whole``: an integer; ``flag``: true or false; ``choice``: one of ``choices``
    - ``quantity``: text with a unit of ``dimension``, see :data:`modgen.units.UNITS`
    - ``level``: volts or cents; ``scale``: a share or cents per octave; ``offset``: volts or a share of span
    - ``span``: a range of voltages, two fields of the model
    - ``range``: two quantities of ``dimension``, the lower first
    - ``section``: a mapping with the keys of ``section``; ``jacks``: that, or the total
    - ``waivers``: a list of mappings with the keys of ``section``

    least and most are in base SI units; ``above`` says that ``least`` itself is not allowed. default is the
    text that the page would state; pitch_default takes its place with ``signal.pitch: true``. example is for
    messages and the starter page. only says when the key counts at all. says describes it in one line.
    """

    kind: str
    says: str
    default: str = ""
    example: str = ""
    required: bool = False
    dimension: str = ""
    least: float | None = None
    most: float | None = None
    above: bool = False
    choices: tuple[str, ...] = ()
    section: type | None = None
    page: str = ""
    pitch_default: str = ""
    only: str = ""

    @property
    def bounds(self) -> str:
        """The bounds in words, or an empty text: ``from 100 µs to 1000 s``, ``above 0 V, up to 20 V``."""
        if self.least is None or self.most is None:
            return ""
        low, high = self.bound(self.least), self.bound(self.most)
        return f"above {low}, up to {high}" if self.above else f"from {low} to {high}"

    def bound(self, value: float) -> str:
        """A bound with its unit."""
        if self.kind == "whole" or not self.dimension:
            return f"{value:.0f}"
        return format_quantity(value, self.dimension)

    def inside(self, value: float) -> bool:
        """Whether a value keeps the bounds; there may be none."""
        if self.least is None or self.most is None:
            return True
        return (value > self.least if self.above else value >= self.least) and value <= self.most

    @property
    def help(self) -> str:
        """The description with bounds, choices and condition."""
        parts = [self.says]
        if self.choices:
            parts.append(" or ".join((", ".join(self.choices[:-1]), self.choices[-1])))
        elif self.bounds:
            parts.append(self.bounds)
        if self.only:
            parts.append(f"only with {self.only}")
        return "; ".join(parts)


def key(kind: str, says: str, **more: Any) -> dict[str, Key]:
    """Field metadata that holds one :class:`Key`."""
    return {"key": Key(kind, says, **more)}


@cache
def keys_of(model: type) -> tuple[tuple[str, Key], ...]:
    """The keys of a section of the page in order: (name of the field, its key)."""
    found: list[tuple[str, Key]] = []
    for item in fields(model):
        definition = _key(item)
        if definition:
            found.append((item.name, definition))
    return tuple(found)


def page_name(field_name: str, definition: Key) -> str:
    """The word on the page for a field of the model."""
    return definition.page or field_name


def _key(item: Field[Any]) -> Key | None:
    found = item.metadata.get("key")
    return found if isinstance(found, Key) else None
