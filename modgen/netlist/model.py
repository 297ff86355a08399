"""A netlist as frozen values: parts, nets and which pin is on which net.

This is what is read back from the built circuit, and what a layout editor's file becomes; rules and
outputs see nothing else of the circuit. A pin that is on no net is simply in no ``Net``.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property


@dataclass(frozen=True)
class Part:
    """One part. ``fields`` are sorted name/value pairs (design convention: lower-case names)."""

    ref: str
    value: str
    land_pattern: str
    fields: tuple[tuple[str, str], ...] = ()
    sheet: str = "/"
    #: pin numbers the library part has, in the file's order; () when the file does not say
    pins: tuple[str, ...] = ()

    def field(self, name: str, default: str = "") -> str:
        """One field's text."""
        for key, value in self.fields:
            if key == name:
                return value
        return default

    @property
    def letters(self) -> str:
        """The reference class: the letters before the number (``R`` of ``R12``)."""
        return self.ref.rstrip("0123456789")

    @property
    def number(self) -> int:
        """The number in the reference, 0 when there is none."""
        digits = self.ref[len(self.letters) :]
        return int(digits) if digits else 0


@dataclass(frozen=True)
class Net:
    """One net and the pins on it: ``(reference, pin number)`` pairs, sorted."""

    name: str
    pins: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Netlist:
    """A whole circuit; parts sorted by reference class and number, nets by name."""

    title: str
    parts: tuple[Part, ...]
    nets: tuple[Net, ...]
    #: messages of the library's own electrical check: (level, text); None when it did not run, as on a file
    library_messages: tuple[tuple[str, str], ...] | None = None

    @cached_property
    def by_ref(self) -> Mapping[str, Part]:
        """Parts by reference; of duplicates the first."""
        out: dict[str, Part] = {}
        for part in self.parts:
            out.setdefault(part.ref, part)
        return out

    @cached_property
    def net_of(self) -> Mapping[tuple[str, str], str]:
        """The net name of every connected pin."""
        return {pin: net.name for net in self.nets for pin in net.pins}

    @cached_property
    def by_net(self) -> Mapping[str, Net]:
        """Nets by name."""
        return {net.name: net for net in self.nets}
