"""The link to a design: what differs from a demo design, as the one short text of `?d=`.

The text is url-safe base64 of zlib of a JSON list: the demo's name, then one or two tables of settings
{path: value}. With two, the first makes the design that was opened (a file), the second what was changed since.
"""

import base64
import json
import zlib
from collections.abc import Iterator, Mapping
from typing import Any

from optics.presets import Document, edited
from optics.spec import OutOfRange

LARGEST_BYTES = 200_000  # of the unpacked text; a link beyond is refused before it fills the memory


def differences(base: Document, document: Document) -> dict[str, Any]:
    """The settings that turn one document into another: `edited(base, differences(base, document)) == document`.

    Changed forms come first, as `edited` applies them first: what a new form fills in by itself is no difference.
    """
    forms = {
        path: value for path, value in _changed(base, document, "") if path.endswith(".form") and value is not None
    }
    start = edited(base, forms)
    return {**forms, **dict(_changed(start, document, ""))}


def _changed(base: Mapping[str, Any], document: Mapping[str, Any], path: str) -> Iterator[tuple[str, Any]]:
    for key in {**base, **document}:
        at = f"{path}.{key}" if path else key
        old, new = base.get(key), document.get(key)
        if isinstance(old, Mapping) and isinstance(new, Mapping):
            yield from _changed(old, new, at)
        elif old != new:
            yield at, new


def written(demo: str, *tables: Mapping[str, Any]) -> str:
    """The text of a link."""
    plain = json.dumps([demo, *tables], separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    return base64.urlsafe_b64encode(zlib.compress(plain.encode(), 9)).decode().rstrip("=")


def read(text: str) -> tuple[str, list[dict[str, Any]]]:
    """(demo, tables of settings) of a link's text; anything else is one sentence."""
    try:
        packed = base64.b64decode(text + "=" * (-len(text) % 4), altchars=b"-_", validate=True)
        unpacker = zlib.decompressobj()
        plain = unpacker.decompress(packed, LARGEST_BYTES)
        if not unpacker.eof:
            raise ValueError("too long")
        found = json.loads(plain, parse_constant=_refuse)
    except (ValueError, zlib.error, RecursionError):
        raise OutOfRange("The link's ?d= cannot be read; it must be copied whole.") from None
    if not (isinstance(found, list) and 2 <= len(found) <= 3 and isinstance(found[0], str)) or not all(
        map(_is_table, found[1:])
    ):
        raise OutOfRange("The link's ?d= holds no design; it must name a demo design and its changes.")
    return found[0], found[1:]


def _is_table(value: Any) -> bool:
    return isinstance(value, dict) and all(key and all(part for part in key.split(".")) for key in value)


def _refuse(constant: str) -> None:
    raise ValueError(constant)
