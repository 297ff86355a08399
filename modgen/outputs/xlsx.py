"""Save a workbook so that the same content is the same bytes.

openpyxl stamps the time of saving into the properties and into the archive, and the archive's compression
depends on the library that the interpreter was built with; all three are taken out.
"""

from __future__ import annotations

import datetime
import io
import re
import zipfile
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from openpyxl import Workbook

#: The date that stands in every workbook: the oldest a zip archive can hold
STAMP = datetime.datetime(1980, 1, 1)
_MODIFIED = re.compile(rb"(<dcterms:modified[^>]*>)[^<]*(</dcterms:modified>)")
_VERSION = re.compile(rb"<AppVersion>[^<]*</AppVersion>")
_APPLICATION = re.compile(rb"<Application>[^<]*</Application>")


def save_plain(book: Workbook) -> bytes:
    """The workbook as a file, without time or version of anything.

    Parameters
    ----------
    book : Workbook
        An openpyxl workbook; its date of creation is set.

    Returns
    -------
    bytes
        An xlsx archive, stored and not compressed, its members in order of name behind the content types.
    """
    book.properties.created = STAMP
    raw = io.BytesIO()
    book.save(raw)
    out = io.BytesIO()
    with zipfile.ZipFile(raw) as source, zipfile.ZipFile(out, "w", zipfile.ZIP_STORED) as target:
        # readers may look for the content types first
        for name in sorted(source.namelist(), key=lambda name: (name != "[Content_Types].xml", name)):
            data = source.read(name)
            if name == "docProps/core.xml":
                data = _MODIFIED.sub(rb"\g<1>" + STAMP.strftime("%Y-%m-%dT%H:%M:%SZ").encode() + rb"\g<2>", data)
            if name == "docProps/app.xml":
                data = _APPLICATION.sub(b"<Application>modgen</Application>", _VERSION.sub(b"", data))
            info = zipfile.ZipInfo(name, STAMP.timetuple()[:6])
            info.create_system = 3
            info.external_attr = 0o644 << 16
            target.writestr(info, data)
    return out.getvalue()
