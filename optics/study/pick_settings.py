"""Settings of the document: what puts a preset in the place of what a table has now."""

from collections.abc import Iterator
from typing import Any

from optics.presets import Document, value_at
from optics.tables import preset

Settings = dict[str, Any]


def preset_settings(document: Document, path: str, folder: str, name: str) -> Settings:
    """Settings that put a preset in the place of what a table has now: values that override the old one are set anew."""
    found, table = preset(folder, name), value_at(document, path) or {}
    settings: Settings = {f"{path}.preset": name}
    for key in table:
        if key in found.values:
            settings[f"{path}.{key}"] = found.values[key].value
        elif key in found.curves:
            curve = found.curves[key]
            settings[f"{path}.{key}"] = {"wavelength_nm": list(curve.wavelength_nm), "value": list(curve.value)}
    return settings


def own_then(document: Document, path: str, folder: str, names: tuple[str, ...]) -> Iterator[Settings]:
    """The design's own choice ({}), then the presets that it is not."""
    yield {}
    own = (value_at(document, path) or {}).get("preset")
    yield from (preset_settings(document, path, folder, name) for name in names if name != own)
