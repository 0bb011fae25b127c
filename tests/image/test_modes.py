import numpy as np
import ofiber
import pytest

from optics.image import modes
from optics.spec import OutOfRange


@pytest.mark.parametrize("v", [1.2, 1.9, 2.5, 3.3, 3.871, 4.7, 5.8, 6.9, 8.1, 9.9])
def test_modes_against_an_open_library(v):
    """Independent route: ofiber's b = (W/V)^2, its own root finder."""
    compared = 0
    for azimuthal in range(5):
        for index, b in enumerate(ofiber.LP_mode_values(v, azimuthal)):
            w = modes.outside_number(v_number=v, azimuthal=azimuthal, radial=index + 1)
            assert w == pytest.approx(v * np.sqrt(b), rel=1e-6)
            compared += 1
    assert compared >= 1


def test_cutoffs_are_zeros_of_bessel_functions():
    assert modes.cutoff_v_number(azimuthal=0, radial=1) == 0.0
    assert modes.cutoff_v_number(azimuthal=2, radial=1) == pytest.approx(3.8317, abs=1e-4)
    assert modes.cutoff_v_number(azimuthal=0, radial=2) == pytest.approx(3.8317, abs=1e-4)
    with pytest.raises(OutOfRange, match=r"v_number is 2; it must be above the cutoff 2\.40483"):
        modes.outside_number(v_number=2.0, azimuthal=1, radial=1)


def test_the_list_holds_all_modes_up_to_its_end():
    end = 10.17
    cutoffs = [
        modes.cutoff_v_number(azimuthal=azimuthal, radial=radial) for azimuthal in range(12) for radial in range(1, 6)
    ]
    assert sum(cutoff < end for cutoff in cutoffs) == len(modes.MODES)
    assert all(table.cutoff_v_number < end for table in modes.mode_tables())


def test_tables_interpolate_to_a_thousandth():
    v = np.linspace(0.9, 25.0, 200)
    for (azimuthal, radial), table in zip(modes.MODES, modes.mode_tables()):
        guided = v[v > table.cutoff_v_number + 0.02]
        solved = modes.outside_number(v_number=guided, azimuthal=azimuthal, radial=radial)
        assert np.allclose(np.interp(guided, table.v_number, table.w), solved, atol=1.5e-3)


def test_launched_share_against_a_numerical_far_field():
    """Independent route: the field of LP21 and LP02 transformed by quadrature, summed over the cone."""
    from scipy.special import jv, kv

    radius = np.linspace(1e-6, 14.0, 2500)
    for number, azimuthal, v in ((2, 2, 5.5), (3, 0, 5.5), (0, 0, 2.2)):
        table = modes.mode_tables()[number]
        node = np.searchsorted(table.v_number, v)
        v, w = table.v_number[node], table.w[node]
        u = np.sqrt(v * v - w * w)
        field = np.where(
            radius < 1, jv(azimuthal, u * radius) / jv(azimuthal, u), kv(azimuthal, w * radius) / kv(azimuthal, w)
        )
        q = np.linspace(0.0, 6.0, 200)
        far = np.array([np.trapezoid(field * jv(azimuthal, x * radius) * radius, radius) for x in q])
        total = np.trapezoid(field**2 * radius, radius)
        for cone in (1.0, 2.5, 5.0):
            inside = q <= cone
            expected = np.trapezoid((far**2 * q)[inside], q[inside]) / total
            got = table.launched_fraction[node, int(cone / modes.CONE_STEP)]
            assert got == pytest.approx(expected, abs=0.01)


def test_all_light_of_a_held_mode_lies_within_a_wide_cone():
    for table in modes.mode_tables():
        held = (table.w > 1.0) & (table.v_number < 14)
        assert (table.launched_fraction[held, -1] > 0.97).all()
        assert (np.diff(table.launched_fraction, axis=1) >= -1e-12).all()


def test_launched_modes_add_up_to_the_etendue_of_the_cone():
    """Incoherent light in a narrow cone fills (k a sine)^2/2 modes, two polarizations: the classical count."""
    v, cone = 40.0, 4.0
    filled = 0.0
    for table in modes.mode_tables():
        node = np.searchsorted(table.v_number, v)
        filled += (2 if table.azimuthal == 0 else 4) * table.launched_fraction[node, int(cone / modes.CONE_STEP)]
    assert filled == pytest.approx(cone**2 / 2, rel=0.1)
