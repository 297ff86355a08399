"""One YAML file, read safely into nodes that know where they stand.

Scalars keep the text that was written: the reader of a field decides what it means, so that YAML 1.1
cannot turn ``NO`` into false, ``12:30`` into 750 or ``1e3`` into text. What makes a page ambiguous or
explosive (duplicate keys, anchors, aliases, merge keys, type tags, deep nesting) is refused.
"""

from modgen.documents.fields import Fields
from modgen.documents.files import read_bytes, shown_path
from modgen.documents.nodes import Node, nearest, shown, unknown
from modgen.documents.reader import DEEPEST, parse_yaml, read_yaml

__all__ = [
    "DEEPEST",
    "Fields",
    "Node",
    "nearest",
    "parse_yaml",
    "read_bytes",
    "read_yaml",
    "shown",
    "shown_path",
    "unknown",
]
