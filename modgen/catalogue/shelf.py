"""The catalogue as one value: the shipped files and the user's own over them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property, lru_cache
from importlib.resources import files
from pathlib import Path
from types import MappingProxyType
from typing import TypeVar

from modgen.catalogue.layers import Known
from modgen.catalogue.loader import Reader
from modgen.catalogue.records import Evidence, Part, PriceBreak
from modgen.documents import parse_yaml, read_yaml
from modgen.problems import InputError, Problem

T = TypeVar("T", bound=Part)

#: largest catalogue file of one's own that is read [byte]
LARGEST_FILE = 5_000_000
#: the shipped files; the first names the sources and bodies that the others use
SHIPPED = (
    "common.yaml",
    "amplifiers.yaml",
    "capacitors.yaml",
    "controls.yaml",
    "diodes.yaml",
    "headers.yaml",
    "jacks.yaml",
    "resistors.yaml",
    "switches.yaml",
)


@dataclass(frozen=True)
class Catalogue:
    """Every part that can be bought, by key.

    parts: sorted by key. replaced: (key, file) of every part that a file of one's own put in the place of
    another. added: (key, file) of every new one.
    """

    parts: Mapping[str, Part]
    replaced: tuple[tuple[str, str], ...] = ()
    added: tuple[tuple[str, str], ...] = ()
    _of: dict[type[Part], tuple[Part, ...]] = field(default_factory=dict, repr=False, compare=False)

    def get(self, key: str) -> Part | None:
        """The part with a key, or None."""
        return self.parts.get(key)

    def of(self, kind: type[T]) -> tuple[T, ...]:
        """Every part of a record type, sorted by key."""
        if kind not in self._of:
            self._of[kind] = tuple(part for part in self.parts.values() if isinstance(part, kind))
        return self._of[kind]  # type: ignore[return-value]

    def with_prices(self, prices: Mapping[str, tuple[PriceBreak, ...]], file: str) -> Catalogue:
        """The same parts at prices of one's own; a part that has none there keeps the catalogue's.

        Parameters
        ----------
        prices : mapping of str to tuple of PriceBreak
            Breaks by rising quantity, by key. [-]
        file : str
            Where they come from, as the evidence of these prices names it. [-]

        Returns
        -------
        Catalogue

        Raises
        ------
        KeyError
            A key is in no catalogue file.
        """
        own = ("prices", Evidence("own file", file))
        parts = dict(self.parts)
        for key, breaks in prices.items():
            others = tuple(pair for pair in parts[key].evidence if pair[0] != "prices")
            parts[key] = replace(parts[key], prices=breaks, evidence=(*others, own))
        return Catalogue(MappingProxyType(parts), self.replaced, self.added)

    @cached_property
    def families(self) -> tuple[str, ...]:
        """Names of the families, sorted."""
        return tuple(sorted({part.family for part in self.parts.values()}))


def load_catalogue(extra: Sequence[Path] = ()) -> Catalogue:
    """The shipped catalogue, with files of one's own over it, in their order.

    Parameters
    ----------
    extra : sequence of Path
        Catalogue files. A part whose key is known replaces it whole; every other is added.

    Returns
    -------
    Catalogue

    Raises
    ------
    InputError
        With every problem of every file.
    """
    shipped, known = _shipped()
    if not extra:
        return shipped
    problems: list[Problem] = []
    reader = Reader(problems, known.copy())
    parts = dict(shipped.parts)
    replaced: list[tuple[str, str]] = []
    added: list[tuple[str, str]] = []
    for path in extra:
        try:
            page = read_yaml(Path(path), what="catalogue file", limit=LARGEST_FILE)
        except InputError as error:
            problems += error.problems
            continue
        for key, part in reader.read(page).items():
            (replaced if key in parts else added).append((key, str(path)))
            parts[key] = part
    if problems:
        # what a family states is looked at with each of its rows: say it once
        raise InputError(list(dict.fromkeys(problems)))
    return Catalogue(_sorted(parts), tuple(replaced), tuple(added))


def _sorted(parts: Mapping[str, Part]) -> Mapping[str, Part]:
    return MappingProxyType({key: parts[key] for key in sorted(parts)})


@lru_cache(maxsize=1)
def _shipped() -> tuple[Catalogue, Known]:
    """The shipped files, and what they name. Their names in messages are bare, the same on every machine."""
    problems: list[Problem] = []
    reader = Reader(problems)
    parts: dict[str, Part] = {}
    folder = files("modgen.catalogue") / "data"
    for name in SHIPPED:
        page = parse_yaml((folder / name).read_bytes(), name, what="catalogue file")
        parts |= reader.read(page)
    if problems:
        raise InputError(problems)
    return Catalogue(_sorted(parts)), reader.known
