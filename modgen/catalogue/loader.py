"""Catalogue files to parts: the sources, bodies and families of one page after another.

A file of one's own has the form of the shipped ones in ``data/``::

    sources:
      my-sheet: {document: maker's data sheet and number, evidence: published document}
    families:
      my-controls:
        kind: control            # decides which figures are needed; an error names those that lack
        like: control-9mm        # optional: the figures of another family, except its parts
        source: my-sheet         # where the figures stated here come from ...
        figures_from: {invented: [prices]}  # ... and those that come from elsewhere
        end_resistance: 20 Ω
        parts:                   # rows: each may state figures of its own, and either a key or values
          - {taper: log, middle: 15 %, values: [100 kΩ, 1 MΩ], prices: {1: 1.20, 100: 0.95}}

``values`` is a list or ``{series: E24, from: 1 Ω, to: 10 MΩ}``; the parts' keys are then made of the family,
the taper or rated voltage, and the value. A body is named (``body: dip8``) or described by package, size,
pitch, lead, span and pin_count.
"""

from __future__ import annotations

from collections.abc import Iterable

from modgen.catalogue.layers import EVIDENCE_KINDS, Known, Layer, read_layer
from modgen.catalogue.readings import article, text_of
from modgen.catalogue.records import Evidence, Part
from modgen.catalogue.rows import RECORDS, Row
from modgen.documents import Fields, Node, shown, unknown
from modgen.problems import Place, Problem


class Reader:
    """Reads catalogue files one after another; what one names, the next may use.

    Parameters
    ----------
    problems : list[Problem]
        Shared by all files.
    known : Known, optional
        Sources, bodies and families that the files may use; added to.
    """

    def __init__(self, problems: list[Problem], known: Known | None = None) -> None:
        self.problems = problems
        self.known = known or Known()
        self._file: dict[str, tuple[Part, Place]] = {}

    def read(self, page: Node) -> dict[str, Part]:
        """The parts of one file by key, in the order of the file."""
        self._file = {}
        fields = Fields(page, self.problems, "", "families: {my-family: {kind: resistor}}")
        sources, bodies, families = (fields.take(key) for key in ("sources", "bodies", "families"))
        fields.rest()
        for key, value in self._entries(sources, "sources"):
            self._source(key, value)
        for key, value in self._entries(bodies, "bodies"):
            self._body(key, value)
        for key, value in self._entries(families, "families"):
            self._family(key, value)
        return {key: part for key, (part, _) in self._file.items()}

    def _entries(self, node: Node | None, where: str) -> tuple[tuple[Node, Node], ...]:
        return Fields(node, self.problems, where).node.entries if node is not None else ()

    def _source(self, key: Node, value: Node) -> None:
        """``name: {document: ..., evidence: ...}``."""
        fields = Fields(value, self.problems, f"sources.{key.text}", "{document: maker and number, evidence: memory}")
        document, evidence = fields.take("document"), fields.take("evidence")
        fields.rest()
        if key.text in self.known.sources:
            self.problems.append(
                key.problem(
                    f"the source '{shown(key.text)}' is already known",
                    "a name stands for one document",
                    "give it another name",
                )
            )
            return
        for name, part in (("document", document), ("evidence", evidence)):
            if part is None and value.kind == "mapping":
                self.problems.append(
                    key.problem(
                        f"the source '{shown(key.text)}' has no {name}",
                        "a figure is worth what its source is worth",
                        f"add {name}: to it",
                    )
                )
        if evidence is not None and evidence.text not in EVIDENCE_KINDS:
            self.problems.append(unknown(evidence, EVIDENCE_KINDS, "kind of evidence"))
        self.known.sources[key.text] = Evidence(
            evidence.text if evidence is not None else "?",
            text_of(document, "document", self.problems) if document is not None else "?",
        )

    def _body(self, key: Node, value: Node) -> None:
        """``name: {package: ..., size: ..., source: ...}``."""
        fields = Fields(value, self.problems, f"bodies.{key.text}", "{package: axial, size: 1 x 1 x 1 mm}")
        layer = read_layer(fields, "", self.known)
        fields.rest()
        if not layer.source and value.kind == "mapping":
            self.problems.append(
                key.problem(
                    f"the body '{shown(key.text)}' has no source",
                    "every figure names where it comes from",
                    "add source: memory, or name a document under 'sources'",
                )
            )
        self.known.bodies[key.text] = layer

    def _family(self, key: Node, value: Node) -> None:
        """``name: {kind: ..., figures, parts or values}``."""
        name = key.text
        fields = Fields(value, self.problems, f"families.{name}", "{kind: resistor, values: [1 kΩ]}")
        kind, base = self._kind(key, fields)
        if not kind:
            return
        layer = read_layer(fields, kind, self.known).over(base)
        rows, values = fields.take("parts"), fields.take("values")
        fields.rest()
        self.known.families[name] = (kind, layer)
        if rows is None:
            self._build([Row(name, kind, layer, key.place, None, values)], key)
        elif values is not None:
            self.problems.append(
                Problem(
                    fields.place("values"),
                    f"the family '{shown(name)}' has both parts and values",
                    "values belong to a row of parts, or to a family that has no rows",
                    "move the values into a row of parts",
                )
            )
        elif rows.kind != "sequence" or not rows.items:
            found = "an empty list" if rows.kind == "sequence" else f"{rows}, not a list"
            self.problems.append(rows.problem(f"parts is {found}", "", "write parts: [{key: my-part}]"))
        else:
            read = []
            for item in rows.items:
                own = Fields(item, self.problems, f"families.{name}.parts", "{key: my-part}")
                own_layer = read_layer(own, kind, self.known).over(layer)
                read.append(Row(name, kind, own_layer, item.place, own.take("key"), own.take("values")))
                own.rest()
            self._build(read, key)

    def _kind(self, key: Node, fields: Fields) -> tuple[str, Layer]:
        """The kind of a family and the figures of the one it is like; an empty kind after a problem."""
        kind_node, like_node = fields.take("kind"), fields.take("like")
        kind, base = "", Layer()
        if like_node is not None:
            if like_node.text not in self.known.families:
                self.problems.append(unknown(like_node, sorted(self.known.families), "family"))
                return "", base
            kind, base = self.known.families[like_node.text]
            base = base.lent(like_node.place)
        if kind_node is not None and kind_node.text not in RECORDS:
            self.problems.append(unknown(kind_node, RECORDS, "kind of part"))
            return "", base
        if kind_node is not None and like_node is not None and kind_node.text != kind:
            self.problems.append(
                kind_node.problem(
                    f"{article(kind_node.text)} cannot be like '{shown(like_node.text)}'",
                    f"that is {article(kind)}, which has other figures",
                    "leave 'kind' or 'like' out",
                )
            )
            return "", base
        if kind_node is not None:
            kind = kind_node.text
        if not kind and fields.node.kind == "mapping":
            self.problems.append(
                key.problem(
                    f"the family '{shown(key.text)}' has no kind",
                    f"the kind decides which figures it has: {', '.join(RECORDS)}",
                    self._kind_to_add(key.text),
                )
            )
        return kind, base

    def _kind_to_add(self, name: str) -> str:
        """How to give a family a kind; one with a known name is most likely meant to replace that one's parts."""
        if name in self.known.families:
            kind = self.known.families[name][0]
            return (
                f"add like: {shown(name)} to take over the figures of the family that is known by this name, "
                f"or kind: {kind} to state all of its own"
            )
        return "add kind: resistor, for example, or like: and the name of a family whose figures it shares"

    def _build(self, rows: list[Row], family: Node) -> None:
        """The parts of the rows; what every row lacks is said once, of the family."""
        lacking = [row.lacking() for row in rows]
        common = [figure for figure in lacking[0] if all(figure in other for other in lacking)]
        self._report(f"the family '{shown(family.text)}'", family.place, common)
        for row, figures in zip(rows, lacking, strict=True):
            own = [figure for figure in figures if figure not in common]
            self._report(f"this row of '{shown(family.text)}'", row.place, own)
            for part, place in row.parts(self.known, self.problems, complete=not figures):
                self._add(part, place)

    def _report(self, subject: str, place: Place, figures: Iterable[str]) -> None:
        figures = list(figures)
        if figures:
            self.problems.append(
                Problem(
                    place,
                    f"{subject} has no {', '.join(figures)}",
                    "what is not stated is not guessed",
                    "add what the maker says",
                )
            )

    def _add(self, part: Part, place: Place) -> None:
        if part.key not in self._file:
            self._file[part.key] = (part, place)
            return
        first = self._file[part.key][1]
        self.problems.append(
            Problem(
                place,
                f"the part '{shown(part.key)}' is there twice",
                f"it is already at line {first.line}, column {first.column}; a key stands for one part",
                "remove one of them or give it another key",
            )
        )
