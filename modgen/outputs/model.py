"""All that the writers of output files may look at."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from modgen.analysis.model import Analyses
from modgen.catalogue import Catalogue
from modgen.design.model import Design
from modgen.netlist.model import Netlist
from modgen.rules.contract import Report
from modgen.spec.model import Spec


@dataclass(frozen=True)
class Job:
    """One module, computed, built and judged; nothing written yet."""

    spec: Spec
    catalogue: Catalogue
    design: Design
    netlist: Netlist
    netlist_text: str
    analyses: Analyses
    report: Report
    #: parts on hand by catalogue key
    stock: Mapping[str, int] = field(default_factory=dict)
