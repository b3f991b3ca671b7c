"""Where something stands, as SARIF 2.1.0 says it: artifact locations, regions, snippets.

Takes places and file names as they were given; gives JSON objects. A name becomes a relative reference of RFC 3986, one
from the root of the file system a ``file`` URI.
"""

from __future__ import annotations

from pathlib import PurePath
from urllib.parse import quote

from seqcheck.machine.places import Place

Json = dict[str, object]


def location(place: Place, source: str | None) -> Json:
    """``source``: the line of text there, if there is one to show."""
    return {"physicalLocation": physical_location(place, source)}


def physical_location(place: Place, source: str | None = None) -> Json:
    """Without a region where the whole file is meant: it could not be read, say."""
    where: Json = {"artifactLocation": artifact_location(place.file)}
    if source is None and (place.line, place.column, place.end_line, place.end_column) == (1, 1, 1, 1):
        return where
    region: Json = {
        "startLine": place.line,
        "startColumn": place.column,
        "endLine": place.end_line,
        "endColumn": place.end_column,
    }
    where["region"] = region
    # A context must hold the whole region, and more than that.
    if source and place.end_line == place.line and (place.column, place.end_column) != (1, len(source) + 1):
        where["contextRegion"] = {"startLine": place.line, "snippet": {"text": source}}
    return where


def artifact_location(name: str) -> Json:
    return {"uri": uri_of(name)}


def uri_of(name: str) -> str:
    """Percent-encoded, with ``/`` between folders."""
    path = PurePath(name)
    name_bytes = _bytes_of(path.as_posix())
    if not path.is_absolute():
        return quote(name_bytes, safe="/")
    written = quote(name_bytes, safe="/:")
    return f"file://{written}" if written.startswith("/") else f"file:///{written}"


def _bytes_of(name: str) -> bytes:
    """The bytes of the name in the file system, where it is no text (PEP 383)."""
    try:
        return name.encode("utf-8", "surrogateescape")
    except UnicodeEncodeError:
        return name.encode("utf-8", "surrogatepass")
