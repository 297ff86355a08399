"""The rules a board is judged by, one module each, and the engine that runs them."""

from modgen.rules.contract import Checked, Context, Fault, Finding, Measurement, Report, Rule
from modgen.rules.engine import (
    InternalError,
    RuleCrash,
    discover,
    finding_text,
    judge,
    rule_names,
    subjects,
)
from modgen.rules.examples import rule_page, rule_table

__all__ = [
    "Checked",
    "Context",
    "Fault",
    "Finding",
    "InternalError",
    "Measurement",
    "Report",
    "Rule",
    "RuleCrash",
    "discover",
    "finding_text",
    "judge",
    "rule_names",
    "rule_page",
    "rule_table",
    "subjects",
]
