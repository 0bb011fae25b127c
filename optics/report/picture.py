"""The picture an operator gets of a subject: what the rendering needs, gathered from the chain's stages for one design.

Sizes in micrometers are at the image: the bundle's face, or the sensor at the tip.
"""

from dataclasses import dataclass

import numpy as np

from optics.chain.columns import Columns, columns
from optics.chain.evaluate import evaluate
from optics.chain.fit import fit
from optics.chain.light import light, medium_index
from optics.chain.target import field_of_view, port_objects, pupil_depth_mm, target
from optics.chain.way_back import Parts, way_back
from optics.fiberscope import Fiberscope
from optics.image.contrast import aberration_mtf, cutoff_lp_mm, diffraction_mtf
from optics.image.lattice import HEXAGONAL_FRACTION, core_area_fraction
from optics.image.objective import apparent_distance_mm, defocus_blur_um, magnification
from optics.image.tip import mirror_image
from optics.report.picture_words import Facts, words_of
from optics.report.views import exit_cone, seen_tint
from optics.scene.irradiance import bore_irradiance_w_m2, plane_irradiance_w_m2
from optics.spec import OutOfRange, require
from optics.spectrum import luminous_flux_lm
from optics.units import AnyUnit, deg_from_rad, mm_from_um, um_from_mm
from optics.viewer.off_axis import edge_acceptance_ratio, edge_light_ratio
from optics.viewer.rendering import View, render, render_chip, smoothed, stretched
from optics.viewer.sight import Sight, sight_on_bore, sight_on_plane, target_magnification
from optics.viewer.subjects import require_subject, subject_reflectance
