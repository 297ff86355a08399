"""What each command does; every function takes the parsed options and returns the exit status."""

from __future__ import annotations

import argparse
import json
import sys
import time
from pathlib import Path
from typing import TYPE_CHECKING

from modgen.problems import InputError, Place, Problem

if TYPE_CHECKING:
    from modgen.spec import Spec

CLEAN, FINDINGS, UNUSABLE = 0, 1, 2


class _Progress:
    """Names the step at work on a terminal once a run has taken a second; silent everywhere else."""

    def __init__(self, subject: str) -> None:
        self._subject, self._start, self._shown = subject, time.monotonic(), False
        self._on = sys.stderr.isatty()

    def __call__(self, step: str) -> None:
        if self._on and time.monotonic() - self._start > 1.0:
            print(f"\r\033[K{self._subject}: {step} ...", end="", file=sys.stderr, flush=True)
            self._shown = True

    def clear(self) -> None:
        if self._shown:
            print("\r\033[K", end="", file=sys.stderr, flush=True)


def build(options: argparse.Namespace) -> int:
    """Build every spec; one that cannot be used does not stop the others, the exit status is the worst."""
    from modgen.chain import run, write
    from modgen.cli.screen import summary

    status = CLEAN
    written: dict[str, str] = {}
    for n, path in enumerate(options.specs):
        progress = _Progress(path)
        try:
            job = run(path, progress)
            before = written.setdefault(job.spec.slug, path)
            if before != path:
                raise _same_folder(job.spec, before)
            folder = write(job, options.out, progress)
        except InputError as error:
            progress.clear()
            print(error, file=sys.stderr)
            status = max(status, UNUSABLE)
            continue
        progress.clear()
        if n:
            print()
        print(summary(job, folder), end="")
        status = max(status, CLEAN if job.report.cleared else FINDINGS)
    return status


def _same_folder(spec: Spec, before: str) -> InputError:
    what = f"module '{spec.module}' has the folder of another module of this run, '{spec.slug}'"
    return InputError([Problem(spec.place("module"), what, f"{before} was written there", "give one another name")])


def check(options: argparse.Namespace) -> int:
    """Judge and print; nothing is written."""
    from modgen.chain import check_netlist, run
    from modgen.cli.screen import report_text

    if not options.spec and not options.netlist:
        fix = "give a spec, a netlist with --netlist, or both"
        raise InputError([Problem(Place("modgen check"), "there is nothing to judge", "", fix)])
    progress = _Progress(options.spec or options.netlist)
    try:
        if options.netlist:
            spec, report = check_netlist(options.spec, options.netlist)
        else:
            job = run(options.spec, progress)
            spec, report = job.spec, job.report
    finally:
        progress.clear()
    if options.format == "json":
        from modgen.outputs.design_json import findings_json

        page = findings_json(report)
        missed = [{"rule": c.rule, "why": c.not_judged} for c in report.checked if not c.judged]
        if missed:
            # without it, "cleared" would promise more than was looked at
            page["not_judged"] = missed
        print(json.dumps(page, indent=2, ensure_ascii=False))
    elif options.format == "sarif":
        from modgen.outputs.sarif import sarif_log

        _print_bytes(sarif_log(report, spec, options.netlist or "", folders=True))
    else:
        print(report_text(report, bool(options.spec)), end="")
        if not options.spec:
            left = [checked.rule for checked in report.checked if not checked.judged]
            print(f"no spec was given; {len(left)} rules were not judged: {', '.join(left)}")
    return CLEAN if report.cleared else FINDINGS


def _print_bytes(content: bytes) -> None:
    """Write a file's content to standard output as it is, whatever code page a redirected output has."""
    raw = getattr(sys.stdout, "buffer", None)
    if raw is None:
        sys.stdout.write(content.decode("utf-8"))
        return
    sys.stdout.flush()
    raw.write(content)


def start(options: argparse.Namespace) -> int:
    """Write a commented spec, never over an existing file."""
    from modgen.spec import starter_text

    path = Path(options.file)
    try:
        with path.open("x", encoding="utf-8", newline="\n") as file:
            file.write(starter_text())
    except FileExistsError:
        raise _unwritable(path, "it exists", "give another name; modgen does not overwrite it") from None
    except OSError as error:
        raise _unwritable(path, error.strerror or str(error), "give a path that can be written") from error
    print(f"{path} written; change it, then: modgen build {path}")
    return CLEAN


def _unwritable(path: Path, why: str, fix: str) -> InputError:
    return InputError([Problem(Place(str(path)), "the spec cannot be written", why, fix)])


def schema(_: argparse.Namespace) -> int:
    """Print the JSON Schema."""
    from modgen.spec import json_schema

    print(json.dumps(json_schema(), indent=2, ensure_ascii=False))
    return CLEAN


def catalogue(options: argparse.Namespace) -> int:
    """Print the parts that have every word."""
    from modgen.catalogue import describe, load_catalogue

    text = describe(load_catalogue([Path(name) for name in options.add]), " ".join(options.filter))
    print(text, end="" if text.endswith("\n") else "\n")
    return CLEAN


def rules(options: argparse.Namespace) -> int:
    """Print the table of rules or one rule's page."""
    from modgen.rules import rule_names, rule_page, rule_table

    if options.name is None:
        print(rule_table(), end="")
        return CLEAN
    if options.name not in rule_names():
        import difflib

        near = difflib.get_close_matches(options.name, rule_names(), 1)
        fix = f"did you mean '{near[0]}'?" if near else "`modgen rules` lists them"
        raise InputError([Problem(Place("modgen rules"), f"there is no rule '{options.name}'", "", fix)])
    print(rule_page(options.name), end="")
    return CLEAN
