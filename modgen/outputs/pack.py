"""Write a module's files so that a folder is always one whole run: never a mixture, never half of one.

The files go into a fresh folder beside the target, which then takes the target's place in one rename. A run
that fails leaves what was there. Runs of the same module wait for each other.
"""

from __future__ import annotations

import json
import os
import re
import secrets
import shutil
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

from modgen.problems import InputError, Place, Problem

try:
    import fcntl
except ImportError:  # not on every system; the renames are then all that keeps two runs apart
    fcntl = None  # type: ignore[assignment]

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: What makes a folder a pack
MARK = "design.json"
#: Every name that a version of modgen has written or will; other files in a pack are somebody's own
OURS = frozenset(
    {
        "assembly.html",
        "bom.csv",
        "bom.xlsx",
        "circuit.cir",
        "design.json",
        "glide.svg",
        "netlist.net",
        "panel.dxf",
        "panel.svg",
        "review.html",
        "review.sarif",
        "schematic.svg",
        "test-record.xlsx",
    }
)


def write_pack(job: Job, out: Path, files: Mapping[str, bytes]) -> Path:
    """Write a module's files to ``out/<module>/``, all of them or none.

    Parameters
    ----------
    job : Job
        Whose files they are; its spec names the folder.
    out : Path
        The folder that holds packs; made when only its last part is missing.
    files : mapping of str to bytes
        What to write, by file name.

    Returns
    -------
    Path
        The folder that was written.

    Raises
    ------
    InputError
        When the folder cannot be written, or when something is there that modgen did not write.
    """
    for name in files:
        if name in ("", ".", "..") or "/" in name or "\\" in name:
            raise ValueError(f"{name!r} is not a file name")
    target = out / job.spec.slug
    made = _make_parent(out)
    try:
        with _alone(out) as alone:
            _check_target(target, files, job.spec.module)
            if alone:
                _clear_litter(target)
            _replace(target, files)
    except BaseException as problem:
        if made:
            _remove_empty(out)
        if isinstance(problem, OSError):
            raise _refusal(
                target,
                f"cannot be written: {problem.strerror or problem}",
                "the last good pack, if there was one, is untouched",
                "make room and permission there, or choose another folder with --out",
            ) from problem
        raise
    return target


def _refusal(place: Path, what: str, why: str, fix: str) -> InputError:
    return InputError([Problem(Place(str(place)), f"{str(place)!r} {what}", why, fix)])


def _make_parent(out: Path) -> bool:
    """See that the folder for packs is there; whether it had to be made."""
    if out.is_dir():
        return False
    if out.exists() or out.is_symlink():
        raise _refusal(out, "is not a folder", "packs are folders inside it", "choose another folder with --out")
    if not out.parent.is_dir():
        raise _refusal(
            out,
            "cannot be made: the folder above it is missing",
            f"there is no folder {str(out.parent)!r}; a mistyped path is more likely than a new tree",
            "make that folder first, or correct the path",
        )
    try:
        out.mkdir(exist_ok=True)
    except OSError as problem:
        raise _refusal(
            out,
            f"cannot be made: {problem.strerror or problem}",
            "packs are folders inside it",
            "choose another folder with --out",
        ) from problem
    return True


def _check_target(target: Path, files: Mapping[str, bytes], module: str) -> None:
    """Refuse to replace anything that is not a pack of this module."""
    if target.is_symlink():
        raise _refusal(
            target,
            "is a symbolic link",
            "replacing it would leave what it points to and break the link",
            "remove the link, or choose another folder with --out",
        )
    if not target.exists():
        return
    if not target.is_dir():
        raise _refusal(
            target,
            "is a file",
            "the pack is a folder of that name",
            "move the file away, or choose another folder with --out",
        )
    names = sorted(entry.name for entry in target.iterdir())
    if names and MARK not in names:
        raise _refusal(
            target,
            f"is a folder without {MARK}, so modgen did not write it",
            "writing there would delete what it holds",
            "move it away, or choose another folder with --out",
        )
    owner = _owner(target / MARK)
    if owner and owner != module:
        raise _refusal(
            target,
            f"is the pack of another module, '{owner}'",
            f"the name '{module}' makes the same folder name",
            "give one of the two another name, remove that folder, or choose another one with --out",
        )
    # what hides is litter of file managers and editors' locks; ~$ is a spreadsheet's lock
    foreign = [n for n in names if n not in OURS and n not in files and not n.startswith((".", "~"))]
    if foreign:
        raise _refusal(
            target,
            f"holds what modgen did not write: {', '.join(foreign)}",
            "a pack is replaced whole, so it would be deleted",
            "move it out of the pack",
        )


def _owner(mark: Path) -> str:
    """The module a pack belongs to; empty when that cannot be read, as in a damaged pack."""
    try:
        page = json.loads(mark.read_bytes())
    except (OSError, ValueError):
        return ""
    spec = page.get("spec") if isinstance(page, dict) else None
    module = spec.get("module") if isinstance(spec, dict) else None
    return module if isinstance(module, str) else ""


@contextmanager
def _alone(folder: Path) -> Iterator[bool]:
    """Let only one run at a time write into a folder; whether that could be had.

    The lock is on the folder itself: it leaves no file and ends with the process. Without it the renames alone
    keep two runs apart: one of them wins, the other may fail.
    """
    if fcntl is None:
        yield False
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX)
            locked = True
        except OSError:  # some file systems have no locks
            locked = False
        yield locked
    finally:
        os.close(handle)


def _clear_litter(target: Path) -> None:
    """Put right what a run that was killed left behind: an old pack set aside comes back, the rest goes."""
    pattern = re.compile(rf"\.{re.escape(target.name)}\.(new|old)-[0-9a-f]{{16}}")
    for entry in sorted(target.parent.iterdir()):
        match = pattern.fullmatch(entry.name)
        if match is None or entry.is_symlink() or not entry.is_dir():
            continue
        if match[1] == "old" and not target.exists():
            entry.rename(target)
        else:
            shutil.rmtree(entry)


def _replace(target: Path, files: Mapping[str, bytes]) -> None:
    mark = secrets.token_hex(8)
    fresh = target.with_name(f".{target.name}.new-{mark}")
    aside = target.with_name(f".{target.name}.old-{mark}")
    try:
        fresh.mkdir()
        for name in sorted(files):
            with open(fresh / name, "xb") as handle:
                handle.write(files[name])
                handle.flush()
                os.fsync(handle.fileno())
        _sync(fresh)
        if target.exists():
            target.rename(aside)
            try:
                fresh.rename(target)
            except BaseException:
                aside.rename(target)
                raise
        else:
            fresh.rename(target)
        _sync(target.parent)
    finally:
        # once the new pack stands, litter that cannot be removed is no reason to call the run a failure
        shutil.rmtree(fresh, ignore_errors=True)
        shutil.rmtree(aside, ignore_errors=True)


def _sync(folder: Path) -> None:
    """Have a folder's names on the disk before going on, where the system can do that."""
    if os.name != "posix":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _remove_empty(folder: Path) -> None:
    try:
        folder.rmdir()
    except OSError:
        return  # somebody else put something there
