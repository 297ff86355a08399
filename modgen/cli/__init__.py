"""The command line: arguments in, one screen out, exit status 0, 1, 2 or 3.

Results go to standard output, messages to standard error. Everything a command needs is imported inside
it, so that help and errors come at once.
"""

from __future__ import annotations

import argparse
import errno
import io
import os
import sys
import traceback
from collections.abc import Sequence

from modgen.problems import InputError
from modgen.version import __version__

CLEAN, FINDINGS, UNUSABLE, INTERNAL = 0, 1, 2, 3

_EXIT = """exit status:
  0  clean
  1  findings of level error (build still writes the pack, marked not cleared for ordering)
  2  an input cannot be used; nothing was written for it
  3  internal error
"""


def parser() -> argparse.ArgumentParser:
    """The command line's grammar."""
    top = argparse.ArgumentParser(
        prog="modgen",
        description="From one page of YAML to a checked netlist, parts list and assembly notes for a lag module.",
        epilog=_EXIT,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    top.add_argument("--version", action="version", version=f"modgen {__version__}")
    commands = top.add_subparsers(dest="command", metavar="COMMAND", required=True)

    def command(name: str, text: str) -> argparse.ArgumentParser:
        return commands.add_parser(name, help=text, description=text[0].upper() + text[1:] + ".")

    build = command("build", "compute, build, check and write the pack of each spec")
    build.add_argument("specs", nargs="+", metavar="SPEC", help="a spec (YAML)")
    build.add_argument("--out", default="output", metavar="DIR", help="where the packs go (default: %(default)s)")

    check = command("check", "judge a module, or a netlist that came back from layout; write nothing")
    check.add_argument("spec", nargs="?", metavar="SPEC", help="a spec (YAML); may be left out with --netlist")
    check.add_argument("--netlist", metavar="FILE", help="judge this netlist instead of the one modgen makes")
    check.add_argument("--format", choices=("text", "json", "sarif"), default="text", help="default: %(default)s")

    start = command("start", "write a commented spec to begin from")
    start.add_argument("file", metavar="FILE", help="the new file; an existing one is left alone")

    command("schema", "print the JSON Schema of the spec, for editors")

    catalogue = command("catalogue", "print what can be bought, with ratings and evidence")
    catalogue.add_argument("filter", nargs="*", metavar="WORD", help="only parts that have all these words")
    catalogue.add_argument(
        "--add", action="append", default=[], metavar="FILE", help="with a catalogue file of your own"
    )

    rules = command("rules", "print the table of rules, or the page of one")
    rules.add_argument("name", nargs="?", metavar="NAME", help="a rule")
    return top


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    try:
        options = parser().parse_args(arguments)
    except SystemExit as stop:  # argparse has printed why
        return int(stop.code or 0)
    from modgen.cli import commands

    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # a terminal or pipe that knows no Ω gets a question mark, not a crash
            stream.reconfigure(errors="replace")
    try:
        status: int = getattr(commands, options.command)(options)
        sys.stdout.flush()
    except InputError as error:
        print(error, file=sys.stderr)
        return UNUSABLE
    except BrokenPipeError:
        # whoever read the output has gone; let the interpreter not complain at exit
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return CLEAN
    except OSError as error:
        if error.errno != errno.ENOSPC:
            return _internal(error)
        print("modgen: no room left on the device that the output goes to", file=sys.stderr)
        return UNUSABLE
    except KeyboardInterrupt:
        print("modgen: stopped; nothing was changed", file=sys.stderr)
        return 130
    except Exception as error:
        return _internal(error)
    return status


def _internal(error: Exception) -> int:
    traceback.print_exception(error, file=sys.stderr)
    print(f"modgen: internal error: {error}\nThis is a fault of modgen, not of your spec.", file=sys.stderr)
    return INTERNAL
