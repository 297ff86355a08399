"""The bytes of a file that somebody named: never more than asked for, never from a device."""

from __future__ import annotations

import stat
from pathlib import Path

from modgen.problems import InputError, Place, Problem


def read_bytes(path: Path, *, what: str, limit: int, form: str = "YAML") -> bytes:
    """The bytes of a regular file that is not larger than ``limit`` [byte]; ``form`` is how it is written.

    Raises
    ------
    InputError
        When it is missing, not a regular file, unreadable or too large.
    """
    file = shown_path(path)

    def refuse(text: str, why: str, fix: str) -> InputError:
        return InputError([Problem(Place(file), text, why, fix)])

    try:
        state = path.stat()
        if stat.S_ISDIR(state.st_mode):
            raise refuse(f"this is a folder, not a {what}", f"a {what} is one {form} file", "name the file")
        if not stat.S_ISREG(state.st_mode):
            # a device or a pipe can be endless, or wait for ever
            raise refuse(f"this is not a regular file, so no {what}", "devices and pipes are not read", "name a file")
        size = state.st_size
        data = b""
        if size <= limit:
            with path.open("rb") as stream:
                data = stream.read(limit + 1)
            size = max(size, len(data))  # some files say 0 and are not empty
    except FileNotFoundError:
        raise refuse(f"this {what} cannot be found", "there is no such file", "check the path") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        fix = "check the path and its permissions"
        raise refuse(f"this {what} cannot be read", f"the system says: {reason}", fix) from None
    if size > limit:
        raise refuse(
            f"this {what} is too large: {size} bytes or more"
            if size == limit + 1
            else f"this {what} is too large: {size} bytes",
            f"at most {limit} bytes are read",
            f"check that this file is a {what}",
        )
    return data


def shown_path(path: Path) -> str:
    """A path as messages name it; bytes that are no text are escaped so that it can always be printed."""
    return str(path).encode("utf-8", "backslashreplace").decode("utf-8")
