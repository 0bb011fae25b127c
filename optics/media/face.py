"""Fresnel reflection at a polished face: per angle, and averaged over a filled cone.

The numerical aperture of a ray, n sin(theta), is the same on both sides of a face, so it is the
angle's name here. Uncoated, clean, unpolarized.
"""

import numpy as np

from optics.spec import not_negative, positive, require, within
from optics.units import Numbers

NODES = 32  # of the Gauss-Legendre rule: exact to 1e-12 for indices 1 to 2 and any cone that passes


def fresnel_reflectance(*, from_index: Numbers, to_index: Numbers, sine: Numbers) -> Numbers:
    """Reflectance of unpolarized light that meets a face, `sine` of the angle on its side.

    (R_s + R_p)/2 by Fresnel's equations; 1 beyond the critical angle. Indices above 0, sine from 0 to 1.

    >>> round(float(fresnel_reflectance(from_index=1.0, to_index=1.5, sine=0.0)), 4)
    0.04
    """
    positive(from_index=from_index, to_index=to_index)
    within(0.0, 1.0, sine=sine)
    refracted = np.asarray(from_index) * sine / to_index
    cosine = np.sqrt(1.0 - np.square(sine))
    return 1.0 - _transmission(from_index, to_index, cosine, np.sqrt(np.maximum(1.0 - refracted**2, 0.0)))


def ray_face_transmission(*, core_index: Numbers, outside_index: Numbers, ray_na: Numbers) -> Numbers:
    """What one face lets through of a ray of numerical aperture n sin(theta), either way.

    0 for a ray that the thinner side cannot take (total reflection). `ray_na` from 0 to the core index.
    """
    positive(core_index=core_index, outside_index=outside_index)
    not_negative(ray_na=ray_na)
    require("ray_na", ray_na, "core_index at most", np.asarray(ray_na) <= core_index)
    inside = np.sqrt(np.maximum(1.0 - np.square(np.asarray(ray_na) / core_index), 0.0))
    outside = np.sqrt(np.maximum(1.0 - np.square(np.asarray(ray_na) / outside_index), 0.0))
    return _transmission(core_index, outside_index, inside, outside)


def face_transmission(*, core_index: Numbers, outside_index: Numbers, na: Numbers) -> Numbers:
    """What one face lets through of a cone filled up to `na`, uniform in sin^2 (uniform radiance).

    Mean of 1 - (R_s + R_p)/2 over the square of the ray's NA. With u the cosine on the thinner
    side, d(NA^2) = -2 n^2 u du takes the root at grazing out of the integrand, and a Gauss-Legendre
    rule is exact to 1e-9 and better. Raises OutOfRange for a cone that is part totally reflected
    (`na` above either index). Source: fresnel_equations.

    >>> round(float(face_transmission(core_index=1.492, outside_index=1.0, na=0.50)) ** 2, 4)
    0.9227
    """
    positive(core_index=core_index, outside_index=outside_index, na=na)
    thin = np.minimum(core_index, outside_index)
    require("na", na, "at most the lower index of the face (beyond it light is totally reflected)", na <= thin)
    thick = np.maximum(core_index, outside_index)[..., None]
    least = np.sqrt(np.maximum(1.0 - np.square(na / thin), 0.0))[..., None]
    at, weight = np.polynomial.legendre.leggauss(NODES)
    u = least + (1.0 - least) * (at + 1.0) / 2
    passed = _transmission(thin[..., None], thick, u, np.sqrt(1.0 - np.square(thin[..., None] / thick) * (1.0 - u**2)))
    return (weight * passed * u).sum(axis=-1) / (1.0 + least[..., 0])


def _transmission(one_index: Numbers, other_index: Numbers, one_cosine: Numbers, other_cosine: Numbers) -> Numbers:
    """Mean of T_s and T_p from both cosines; 0 where a side has none."""
    one_s, other_s = one_index * one_cosine, other_index * other_cosine
    one_p, other_p = one_index * other_cosine, other_index * one_cosine
    four = 4.0 * one_s * other_s
    safe = np.where(four > 0, one_s + other_s, 1.0), np.where(four > 0, one_p + other_p, 1.0)
    return (four / safe[0] ** 2 + four / safe[1] ** 2) / 2
