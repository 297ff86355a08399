"""The way from a spec to a pack, one function a step.

``read`` -> ``compute`` -> ``write``; ``check`` judges without writing. This is what the command line calls and
what ``import modgen`` offers.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path

from modgen.analysis import analyse
from modgen.catalogue import Catalogue, load_catalogue
from modgen.chain.land_patterns import read_land_patterns
from modgen.circuit import build
from modgen.design import make_design
from modgen.netlist import read_netlist
from modgen.outputs import pack_files
from modgen.outputs.model import Job
from modgen.outputs.pack import write_pack
from modgen.problems import InputError, Problem
from modgen.rules import Report, judge
from modgen.spec import Spec, read_spec

Progress = Callable[[str], None]


def _silent(_: str) -> None:
    """Report no progress."""


def catalogue_of(spec: Spec) -> Catalogue:
    """Load the shipped catalogue with the spec's own files on top; their paths are relative to the spec."""
    folder = Path(spec.file).parent
    return load_catalogue([folder / name for name in spec.build.catalogue])


def run(path: str | Path, progress: Progress = _silent) -> Job:
    """Read a spec and compute, build and judge its module; nothing is written.

    Parameters
    ----------
    path : str or Path
        The spec. [-]
    progress : callable
        Told the name of each step as it starts. [-]

    Returns
    -------
    Job
        Spec, design, netlist, analyses and report. [-]

    Raises
    ------
    InputError
        The spec or a file it names cannot be used, or cannot be met from the catalogue.
    modgen.rules.InternalError
        A rule crashed.
    """
    progress("reading")
    spec, catalogue = _load(path)
    names: Mapping[str, str] = {}
    if spec.build.land_patterns:
        names = read_land_patterns(Path(spec.file).parent / spec.build.land_patterns)
    progress("sizing")
    design = make_design(spec, catalogue)
    progress("building the circuit")
    built = build(design, names)
    progress("checking")
    analyses = analyse(built.netlist, catalogue, spec)
    report = judge(built.netlist, catalogue, spec)
    return Job(spec, catalogue, design, built.netlist, built.netlist_text, analyses, report)


def write(job: Job, out: str | Path, progress: Progress = _silent) -> Path:
    """Write every file of a module to a folder of its name below ``out``, all or nothing; returns the folder.

    Raises
    ------
    InputError
        The folder cannot be written, or holds something that is not a pack.
    """
    progress("writing")
    return write_pack(job, Path(out), pack_files(job))


def check_netlist(path: str | Path, netlist: str | Path) -> tuple[Spec, Report]:
    """Judge a netlist file against the rules and a spec.

    Raises
    ------
    InputError
        The spec or the netlist cannot be read; problems of both are given together.
    """
    problems: list[Problem] = []
    read = None
    try:
        read = read_netlist(Path(netlist))
    except InputError as error:
        problems += error.problems
    try:
        spec, catalogue = _load(path)
    except InputError as error:
        raise InputError([*problems, *error.problems]) from error
    if read is None:
        raise InputError(problems)
    return spec, judge(read, catalogue, spec)


def _load(path: str | Path) -> tuple[Spec, Catalogue]:
    spec = read_spec(Path(path))
    return spec, catalogue_of(spec)
