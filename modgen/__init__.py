"""modgen: from one page of YAML to a checked netlist, parts list and assembly notes for lag modules.

>>> import modgen
>>> job = modgen.run("specs/four-lane-pitch-lag.yaml")     # doctest: +SKIP
>>> job.report.cleared                                       # doctest: +SKIP
True
>>> modgen.write(job, "output")                              # doctest: +SKIP
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from modgen.version import __version__ as __version__

if TYPE_CHECKING:
    from modgen.catalogue import load_catalogue
    from modgen.chain import check_netlist, run, write
    from modgen.outputs.model import Job
    from modgen.problems import InputError, Problem
    from modgen.rules import Report
    from modgen.spec import Spec, read_spec

#: Loaded when first asked for, so that ``modgen --help`` does not wait for what it does not use.
_HOMES = {
    "Job": "modgen.outputs.model",
    "InputError": "modgen.problems",
    "Problem": "modgen.problems",
    "Report": "modgen.rules",
    "Spec": "modgen.spec",
    "check_netlist": "modgen.chain",
    "load_catalogue": "modgen.catalogue",
    "read_spec": "modgen.spec",
    "run": "modgen.chain",
    "write": "modgen.chain",
}

__all__ = [
    "InputError",
    "Job",
    "Problem",
    "Report",
    "Spec",
    "check_netlist",
    "load_catalogue",
    "read_spec",
    "run",
    "write",
]


def __getattr__(name: str) -> Any:
    """Load a public name from its home."""
    if name not in _HOMES:
        raise AttributeError(f"module 'modgen' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(_HOMES[name]), name)
