"""The way from a spec to a pack, one function a step.

``read`` -> ``compute`` -> ``write``; ``check`` judges without writing. This is what the command line calls and
what ``import modgen`` offers.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path

from modgen.analysis import analyse
from modgen.catalogue import Catalogue, PriceBreak, load_catalogue, read_prices, read_stock
from modgen.chain.land_patterns import read_land_patterns
from modgen.circuit import build
from modgen.circuit.plan import plan_of
from modgen.design import make_design
from modgen.netlist import Netlist, read_netlist
from modgen.outputs import pack_files
from modgen.outputs.model import Job
from modgen.outputs.pack import write_pack
from modgen.problems import InputError, Problem
from modgen.rules import Report, judge
from modgen.spec import Spec, missing_file, read_spec

Progress = Callable[[str], None]


def _silent(_: str) -> None:
    """Report no progress."""


def catalogue_of(spec: Spec) -> Catalogue:
    """Load the shipped catalogue with the spec's own files and prices on top; their paths are relative to the spec.

    Raises
    ------
    InputError
        With every problem of these files.
    """
    problems = list[Problem]()
    catalogue: Catalogue | None = None
    prices: Mapping[str, tuple[PriceBreak, ...]] = {}
    with _collecting(problems):
        catalogue = load_catalogue(_there(spec, "build.catalogue", spec.build.catalogue, problems))
    for path in _there(spec, "order.prices", (spec.order.prices,), problems):
        with _collecting(problems):
            # without a catalogue there are no keys to know; all else of the file can still be judged
            prices = read_prices(path, catalogue.parts if catalogue else None)
    if catalogue is None or problems:
        raise InputError(problems)
    return catalogue.with_prices(prices, spec.order.prices) if prices else catalogue


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
    spec = read_spec(Path(path))
    catalogue, names, stock = _files(spec)
    progress("sizing")
    design = make_design(spec, catalogue)
    progress("building the circuit")
    built = build(design, names)
    progress("checking")
    analyses = analyse(built.netlist, catalogue, spec)
    report = judge(built.netlist, catalogue, spec, intended=plan_of(design, names).netlist)
    return Job(spec, catalogue, design, built.netlist, built.netlist_text, analyses, report, stock)


def write(job: Job, out: str | Path, progress: Progress = _silent) -> Path:
    """Write every file of a module to a folder of its name below ``out``, all or nothing; returns the folder.

    Raises
    ------
    InputError
        The folder cannot be written, or holds something that is not a pack.
    """
    progress("writing")
    return write_pack(job, Path(out), pack_files(job))


def check_netlist(path: str | Path | None, netlist: str | Path) -> tuple[Spec | None, Report]:
    """Judge a netlist file by the rules, and by a spec where there is one: then it is compared with the spec's own.

    Parameters
    ----------
    path : str, Path or None
        The spec; without one the rules that need no intent run, and the shipped catalogue says what the parts are. [-]
    netlist : str or Path
        The netlist. [-]

    Raises
    ------
    InputError
        The spec or the netlist cannot be read, or the spec cannot be met; problems of both are given together.
    modgen.rules.InternalError
        A rule crashed.
    """
    problems: list[Problem] = []
    read: Netlist | None = None
    spec: Spec | None = None
    intended: Netlist | None = None
    catalogue: Catalogue | None = None
    with _collecting(problems):
        read = read_netlist(Path(netlist))
    with _collecting(problems):
        if path is None:
            catalogue = load_catalogue()
        else:
            spec = read_spec(Path(path))
            catalogue = catalogue_of(spec)
            intended = plan_of(make_design(spec, catalogue), {}).netlist
    if read is None or catalogue is None or problems:
        raise InputError(problems)
    return spec, judge(read, catalogue, spec, intended=intended)


def _files(spec: Spec) -> tuple[Catalogue, Mapping[str, str], Mapping[str, int]]:
    """Every file that a spec names: catalogue with prices, land-pattern names, parts on hand.

    Raises
    ------
    InputError
        With the problems of all of them.
    """
    problems = list[Problem]()
    catalogue: Catalogue | None = None
    names: Mapping[str, str] = {}
    stock: Mapping[str, int] = {}
    with _collecting(problems):
        catalogue = catalogue_of(spec)
    for path in _there(spec, "build.land_patterns", (spec.build.land_patterns,), problems):
        known = {part.land_pattern for part in catalogue.parts.values()} if catalogue else None
        with _collecting(problems):
            names = read_land_patterns(path, known)
    for path in _there(spec, "order.stock", (spec.order.stock,), problems):
        with _collecting(problems):
            stock = read_stock(path, catalogue.parts if catalogue else None)
    if catalogue is None or problems:
        raise InputError(problems)
    return catalogue, names, stock


def _there(spec: Spec, key: str, names: Sequence[str], problems: list[Problem]) -> list[Path]:
    """The named files that are there, relative to the spec; what is not is a problem where the spec names it."""
    found = []
    for name in filter(None, names):
        problem = missing_file(spec, key, name)
        if problem is None:
            found.append(Path(spec.file).parent / name)
        else:
            problems.append(problem)
    return found


@contextmanager
def _collecting(problems: list[Problem]) -> Iterator[None]:
    """Keep the problems of one file and go on with the next."""
    try:
        yield
    except InputError as error:
        problems += error.problems
