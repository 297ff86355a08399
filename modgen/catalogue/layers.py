"""One level of a catalogue file (a family, or a row of it): the figures it states and where they come from."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

from modgen.catalogue.figures import FIGURES, Figure
from modgen.catalogue.packages import PACKAGES
from modgen.catalogue.readings import (
    article,
    items_of,
    read_forward,
    read_prices,
    read_scalar,
    read_size,
    read_whole,
    text_of,
)
from modgen.catalogue.records import Evidence, PriceBreak
from modgen.documents import Fields, Node, nearest, shown, unknown
from modgen.problems import Place, Problem

#: keys that describe a body, beside ``body`` itself, which names one
BODY_KEYS = ("package", "size", "pitch", "lead", "span", "pin_count")
_TEXT_KEYS = ("description", "note", "order_code")
#: what ``figures_from`` may name besides the figures of the kind
OTHER_FIGURES = ("body", "pins", "prices", "order_code")
EVIDENCE_KINDS = ("published document", "common practice", "memory", "invented")


@dataclass
class Layer:
    """What one level states.

    source: where its figures come from. sources: figure to source id, for those from elsewhere. borrowed:
    figures of another family (``like``); their sources do not stand for what is stated anew. places: where
    each key stands.
    """

    figures: dict[str, object] = field(default_factory=dict)
    body: dict[str, object] = field(default_factory=dict)
    text: dict[str, str] = field(default_factory=dict)
    prices: tuple[PriceBreak, ...] = ()
    pack: int = 0
    alternates: tuple[str, ...] = ()
    source: str = ""
    sources: dict[str, str] = field(default_factory=dict)
    places: dict[str, Place] = field(default_factory=dict)
    borrowed: frozenset[str] = frozenset()

    def lent(self, place: Place) -> Layer:
        """The level as another family takes it over: each figure with its own source, no common one.

        What is wrong with it there is wrong at ``place``, where it is taken over.
        """
        figures = frozenset({*self.stated(), "pins"})
        sources = {figure: self.source_of(figure) for figure in figures}
        places = dict.fromkeys(self.places, place)
        return replace(self, source="", sources=sources, places=places, borrowed=figures)

    def over(self, base: Layer) -> Layer:
        """A new layer: this level laid over another one, each figure keeping its own source."""
        sources = dict(base.sources)
        for figure in self.stated():
            if self.source:
                sources[figure] = self.source
            elif figure in base.borrowed:
                sources.pop(figure, None)
        sources |= self.sources
        # what the level below states without a source of its own keeps that level's default
        if base.source:
            for figure in base.stated():
                if figure not in self.stated():
                    sources.setdefault(figure, base.source)
        return Layer(
            figures=base.figures | self.figures,
            body=base.body | self.body,
            text=base.text | self.text,
            prices=self.prices or base.prices,
            pack=self.pack or base.pack,
            alternates=self.alternates or base.alternates,
            source=self.source or base.source,
            sources=sources,
            places=base.places | self.places,
            borrowed=base.borrowed - self.stated(),
        )

    def stated(self) -> set[str]:
        """The figures that this level states."""
        out = set(self.figures)
        if self.body:
            out.add("body")
        if self.prices:
            out.add("prices")
        if self.text.get("order_code"):
            out.add("order_code")
        return out

    def source_of(self, figure: str) -> str:
        """The source id of a figure; empty when the file gives none."""
        return self.sources.get(figure, self.source)


@dataclass
class Known:
    """What the files read so far have named."""

    sources: dict[str, Evidence] = field(default_factory=dict)
    bodies: dict[str, Layer] = field(default_factory=dict)
    families: dict[str, tuple[str, Layer]] = field(default_factory=dict)  # name to (kind, figures)

    def copy(self) -> Known:
        """The same names, to be added to apart."""
        return Known(dict(self.sources), dict(self.bodies), dict(self.families))


def read_layer(fields: Fields, kind: str, known: Known) -> Layer:
    """Read the keys that a family and its rows share; problems go to ``fields.problems``.

    Without a kind only those of a body are read.
    """
    layer = Layer()
    problems = fields.problems
    for key, figure in FIGURES[kind].items():
        node = fields.take(key)
        if node is not None:
            layer.places[key] = fields.place(key)
            value = (
                read_forward(node, problems) if figure.kind == "forward" else read_scalar(node, key, figure, problems)
            )
            if value is not None:
                layer.figures[key] = value
    _body(fields, layer, known, named=bool(kind))
    node = fields.take("source")
    if node is not None:
        layer.source = source_id(node, known, problems)
    if not kind:
        return layer
    for key in _TEXT_KEYS:
        node = fields.take(key)
        if node is not None:
            layer.text[key] = text_of(node, key, problems)
    node = fields.take("prices")
    if node is not None:
        layer.places["prices"] = fields.place("prices")
        layer.prices = read_prices(node, problems)
    node = fields.take("pack")
    if node is not None:
        layer.pack = read_whole(node, "pack", problems)
    node = fields.take("alternates")
    if node is not None:
        layer.alternates = tuple(
            text_of(item, "alternates", problems) for item in items_of(node, "alternates", problems)
        )
    _sources(fields, layer, kind, known)
    return layer


def _sources(fields: Fields, layer: Layer, kind: str, known: Known) -> None:
    """``figures_from``: the figures that do not come from ``source``."""
    node = fields.take("figures_from")
    if node is None:
        return
    names = (*FIGURES[kind], *OTHER_FIGURES)
    where = f"{fields.where}.figures_from"
    named: set[str] = set()
    for key, value in Fields(node, fields.problems, where, "{memory: [gain, cmrr]}").node.entries:
        source = source_id(key, known, fields.problems)
        for item in items_of(value, f"figures_from.{key.text}", fields.problems):
            if item.text not in names:
                fields.problems.append(unknown(item, names, f"figure of {article(kind)}"))
            elif item.text in named:
                fields.problems.append(
                    item.problem(
                        f"the figure '{item.text}' has two sources",
                        "figures_from names it more than once",
                        "leave one of them",
                    )
                )
            else:
                named.add(item.text)
                layer.sources[item.text] = source


def source_id(node: Node, known: Known, problems: list[Problem]) -> str:
    """A source that is known, or a problem; the text either way, so that one mistake is reported once."""
    if node.kind != "scalar":
        problems.append(node.problem(f"a source is {node}, not a name", "", "write one of the names under 'sources'"))
        return "?"
    if node.text not in known.sources:
        near = nearest(node.text, known.sources)
        problems.append(
            node.problem(
                f"unknown source '{shown(node.text)}'",
                "every figure names where it comes from, by an entry under 'sources'",
                (f"did you mean '{near}'? Otherwise " if near else "")
                + "add it under 'sources' with its document and evidence, or write memory or practice",
            )
        )
    return node.text


def _body(fields: Fields, layer: Layer, known: Known, *, named: bool) -> None:
    """``body`` and the keys that describe one."""
    problems = fields.problems
    node = fields.take("body") if named else None
    if node is not None:
        layer.places["body"] = fields.place("body")
        base = known.bodies.get(node.text) if node.kind == "scalar" else None
        if base is None:
            problems.append(unknown(node, sorted(known.bodies), "body"))
        else:
            layer.body |= base.body
            layer.places |= dict.fromkeys(base.body, node.place)
            layer.sources["body"] = base.source_of("body")
    for key in BODY_KEYS:
        node = fields.take(key)
        if node is None:
            continue
        layer.places.setdefault("body", fields.place(key))
        layer.places[key] = fields.place(key)
        text = text_of(node, key, problems)
        if key == "package":
            if text in PACKAGES:
                layer.body[key] = text
            else:
                problems.append(unknown(node, PACKAGES, "package"))
        elif key == "pin_count":
            layer.body[key] = read_whole(node, key, problems)
        elif key == "size":
            size = read_size(node, problems)
            if size:
                layer.body[key] = size
        else:
            value = read_scalar(node, key, Figure("length", most=1.0), problems)
            if value is not None:
                layer.body[key] = value
