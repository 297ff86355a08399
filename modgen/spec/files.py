"""Files that a spec names: told where they are named when they are not there."""

from __future__ import annotations

from pathlib import Path

from modgen.documents import shown, shown_path
from modgen.problems import Problem
from modgen.spec.model import Spec

_CALLED = {
    "build.catalogue": "catalogue file",
    "build.land_patterns": "land-pattern file",
    "order.stock": "stock file",
    "order.prices": "price file",
}


def missing_file(spec: Spec, key: str, path: Path | str) -> Problem | None:
    """The problem of a file that a spec names and that is not there.

    Parameters
    ----------
    spec : Spec
        The spec; its own file is what the paths in it are relative to.
    key : str
        ``build.catalogue``, ``build.land_patterns``, ``order.stock`` or ``order.prices``.
    path : Path or str
        The path as the spec has it; of a list, the one that is looked for.

    Returns
    -------
    Problem or None
        At the place in the spec; None when something of that name is there, whatever it is.

    Raises
    ------
    KeyError
        The key names no file.
    """
    called = _CALLED[key]
    looked = Path(spec.file).parent / path
    try:
        looked.stat()
    except (FileNotFoundError, NotADirectoryError):
        pass
    except (OSError, ValueError):
        return None  # there, or unspeakable: who opens it says more
    else:
        return None
    names = spec.build.catalogue if key == "build.catalogue" else ()
    item = f"[{names.index(str(path)) + 1}]" if str(path) in names else ""
    return Problem(
        spec.place(key + item),
        f"the {called} '{shown(str(path))}' cannot be found",
        f"paths are relative to the spec, and there is no file {shown_path(looked)}",
        f"check {key}, or put the file there",
    )
