"""Everything a run leaves behind, as bytes by file name."""

from __future__ import annotations

from collections.abc import Mapping

from modgen.outputs.assembly import assembly_html
from modgen.outputs.design_json import design_json
from modgen.outputs.model import Job
from modgen.outputs.review import review_html
from modgen.outputs.sarif import sarif_log
from modgen.outputs.spice import spice_deck
from modgen.outputs.table_csv import write_bom_csv
from modgen.outputs.workbook import write_bom_xlsx

__all__ = ["Job", "pack_files"]


def pack_files(job: Job) -> Mapping[str, bytes]:
    """Make every file of a module's pack; the same job gives the same bytes."""
    return {
        "netlist.net": job.netlist_text.encode("utf-8"),
        "circuit.cir": spice_deck(job),
        "design.json": design_json(job),
        "bom.xlsx": write_bom_xlsx(job),
        "bom.csv": write_bom_csv(job),
        "assembly.html": assembly_html(job),
        "review.html": review_html(job),
        "review.sarif": sarif_log(job.report, job.spec),
    }
