"""The axes of pick: what a design may choose, each choice as the columns that result.

Everything that a choice changes stands in its settings, so that they reproduce the candidate from the document alone.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass

from optics.chain.axes import Axis
from optics.chain.columns import columns
from optics.chain.fit import fit
from optics.chain.solve import solved
from optics.chain.target import field_of_view, image_size_mm
from optics.fiberscope import Fiberscope
from optics.presets import Document, edited, resolve
from optics.spec import OutOfRange
from optics.study.pick_parts import FIELD_MARGIN, FIELDS, GUIDE_SHARES, PORTS, guides, images, lamps, ports
from optics.study.pick_settings import Settings


@dataclass(frozen=True, slots=True)
class Choices:
    """One axis: what each of its choices sets, and the columns that result; the first sets nothing: the design as it is."""

    name: str
    settings: tuple[Settings, ...]
    axis: Axis


def axes(document: Document, scope: Fiberscope) -> list[Choices]:
    """The axes of a design: guide, lamp, ports and image, each with the choices that stand on their own."""
    tube = widest_mm(scope)
    found = [("guide", ("guide.",), guides(document, scope, tube)), ("lamp", ("source.",), lamps(document, scope))]
    if scope.scene is not None:
        found.append(("ports", ("scene.ports.",), ports(scope)))
    if scope.image is not None:
        found.append(("image", ("image.", "viewer."), images(document, scope, tube, _fields_deg(scope))))
    # Ports placed one by one fit one guide only: choices of a guide are checked with ports that follow it.
    free = scope.scene is not None and scope.scene.ports.form == "placed"
    neutral = edited(document, PORTS[0]) if free else document
    return [_choices(name, prefixes, neutral if name == "guide" else document, each) for name, prefixes, each in found]


def widest_mm(scope: Fiberscope) -> float:
    """The widest tube that is allowed: by the need, the bore, or the section; else what the design takes now."""
    given = [scope.needs.outer_diameter_mm]
    if scope.body is not None:
        outer = scope.body.section.outer_diameter_mm
        given += [None if isinstance(outer, str) else outer, scope.body.passage and scope.body.passage.bore_mm]
    known = [limit for limit in given if limit]
    if known:
        return min(known)
    table = columns([scope])
    outer = float(fit(table, image_size_mm(table))[0]["outer_diameter_mm"][0])
    return outer if math.isfinite(outer) else scope.guide.bundle.diameter_mm / GUIDE_SHARES[2]


def _fields_deg(scope: Fiberscope) -> list[float]:
    """Fields of view to choose lenses for: just over the need, or the design's own and a narrower one."""
    if scope.needs.field_of_view_deg is not None:
        return [scope.needs.field_of_view_deg * FIELD_MARGIN]
    own = float(field_of_view(solved(columns([scope])))["field_of_view_deg"][0])
    return [own * share for share in FIELDS]


def _choices(name: str, prefixes: tuple[str, ...], document: Document, wanted: Iterator[Settings]) -> Choices:
    """The choices that resolve, each once."""
    kept, scopes, seen = [{}], [resolve(document).fiberscope], set()
    for settings in wanted:
        try:
            scope = resolve(edited(document, settings)).fiberscope
        except OutOfRange:
            continue  # impossible on its own: a table that the preset cannot fill, a bundle too thin for its fiber
        key = repr(sorted(settings.items(), key=str))
        if key not in seen:
            seen.add(key)
            kept.append(settings)
            scopes.append(scope)
    return Choices(name, tuple(kept), Axis(prefixes, columns(scopes)))
