"""The spec: one page of YAML, read into frozen values with every default resolved."""

from modgen.spec.files import missing_file
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
from modgen.spec.names import slug
from modgen.spec.reader import parse_spec, read_spec
from modgen.spec.resolved import resolved
from modgen.spec.schema import json_schema
from modgen.spec.starter import starter_text

__all__ = [
    "Accuracy",
    "Build",
    "Glide",
    "Jacks",
    "Order",
    "Output",
    "Rails",
    "Signal",
    "Spec",
    "Waiver",
    "json_schema",
    "missing_file",
    "parse_spec",
    "read_spec",
    "resolved",
    "slug",
    "starter_text",
]
