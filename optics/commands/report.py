"""`report`: the whole answer for one design on paper (PDF), or its cross-section as a drawing in millimeters (DXF)."""

import argparse
from typing import TYPE_CHECKING

from optics import presets
from optics.commands.terminal import add_design, opened, writable, write
from optics.fiberscope import Fiberscope
from optics.spec import OutOfRange

if TYPE_CHECKING:
    from optics.figures.pdf import Contents
    from optics.study.smallest_change import Change

SUFFIXES = (".pdf", ".dxf")
MAP_POINTS = 161


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument(
        "--to",
        required=True,
        metavar="FILE",
        help="where to write: .pdf for the report, .dxf for the tube's cross-section in millimeters",
    )
    parser.add_argument("--force", action="store_true", help="write over an existing file")


def run(options: argparse.Namespace) -> int:
    path = writable(options.to, SUFFIXES, options.force)
    design = opened(options)
    data = pdf_of(design) if path.suffix == ".pdf" else dxf_of(design)
    write(path, data)
    return 0


def pdf_of(design: presets.Design) -> bytes:
    """The report of a design as the bytes of a PDF, the same every time."""
    from optics.figures.pdf import pdf

    return pdf(contents_of(design))


def contents_of(design: presets.Design) -> "Contents":
    """All that the report shows, worked out once."""
    from optics.figures.pdf import Contents
    from optics.report import views
    from optics.report.size import size
    from optics.study.working_range import over_distance

    scope, report = design.fiberscope, size(design.fiberscope, design.sourced)
    return Contents(
        design=design,
        file=presets.saved(design.document),
        report=report,
        spectra=views.spectra(scope),
        target=views.target_map(scope, MAP_POINTS),
        section=views.section_view(scope),
        passage=views.passage_view(scope),
        working_range=over_distance(scope) if scope.scene else None,
        change=_change(scope) if report.summary.needs_met is False else None,
    )


def _change(scope: Fiberscope) -> "Change | None":
    """The smallest change of one number that meets all that is asked, if there is one."""
    import numpy as np

    from optics.chain.columns import columns
    from optics.chain.evaluate import evaluate
    from optics.study.pick_needs import margins
    from optics.study.smallest_change import smallest_changes

    table = columns([scope])
    found = smallest_changes(scope.needs, table, margins(scope.needs, table, evaluate(table)), np.array([0]))
    return found.get(0)


def dxf_of(design: presets.Design) -> bytes:
    """The cross-section of a design as the bytes of a DXF drawing."""
    from optics.figures.dxf import section_dxf
    from optics.report.size import VERSION, design_hash
    from optics.report.views import section_view

    view = section_view(design.fiberscope)
    if view is None:
        raise OutOfRange("a .dxf shows the cross-section, which needs [body.section]; this design does not have it.")
    told = f"{design.fiberscope.name}, design {design_hash(design.fiberscope)}, version {VERSION}"
    return section_dxf(view, notes=(told,))
