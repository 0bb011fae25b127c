import numpy as np
import pytest

from optics.image import lattice
from optics.spec import OutOfRange

ROWS = np.array([[1.0, 0.0], [0.5, np.sqrt(0.75)]])


def test_limits_by_direction_repeat_every_60_degrees_and_mirror():
    turn = np.arange(-180.0, 181.0, 7.5)
    limit = lattice.resolution_limit_lp_mm(pitch_um=10.0, direction_deg=turn)
    assert np.allclose(limit, lattice.resolution_limit_lp_mm(pitch_um=10.0, direction_deg=turn + 60.0))
    assert np.allclose(limit, lattice.resolution_limit_lp_mm(pitch_um=10.0, direction_deg=-turn))
    assert limit.min() == pytest.approx(1000 / (np.sqrt(3) * 10))
    assert limit.max() == pytest.approx(2000 / 30)


def test_half_the_diameter_in_pitches_is_not_the_lattice_law():
    """1/(2p), the cautious rule, lies 13 % below the worst direction."""
    assert 50.0 / lattice.resolution_limit_lp_mm(pitch_um=10.0, direction_deg=30.0) == pytest.approx(0.866, abs=5e-4)


@pytest.mark.parametrize(
    ("alias", "rows", "limit"),
    [
        (lattice.alias, ROWS, lattice.resolution_limit_lp_mm),
        (lattice.square_alias, np.eye(2), lattice.square_limit_lp_mm),
    ],
)
def test_alias_gives_the_same_samples_and_none_is_coarser(alias, rows, limit):
    """Independent routes: the samples themselves, and a search over 31 x 31 reciprocal vectors."""
    rng = np.random.default_rng(11)
    frequency, turn = rng.uniform(0.0, 400.0, 300), rng.uniform(0.0, 180.0, 300)
    found = alias(frequency_lp_mm=frequency, direction_deg=turn, pitch_um=10.0)

    def per_pitch(size, turn_deg):
        return size[:, None] / 100 * np.c_[np.cos(np.deg2rad(turn_deg)), np.sin(np.deg2rad(turn_deg))]

    wave, seen = per_pitch(frequency, turn), per_pitch(found.frequency_lp_mm, found.direction_deg)
    places = np.array([(i, j) for i in range(-5, 6) for j in range(-5, 6)]) @ rows
    assert np.allclose(np.cos(2 * np.pi * wave @ places.T), np.cos(2 * np.pi * seen @ places.T), atol=1e-9)
    reciprocal = np.array([(i, j) for i in range(-15, 16) for j in range(-15, 16)]) @ np.linalg.inv(rows).T
    shortest = np.linalg.norm(wave[:, None, :] - reciprocal, axis=2).min(axis=1) * 100
    assert np.allclose(found.frequency_lp_mm, shortest, atol=1e-9)
    own_limit = limit(pitch_um=10.0, direction_deg=turn)
    same = np.isclose(found.frequency_lp_mm, frequency)
    assert (same == (frequency <= own_limit)).all()


def test_beyond_half_the_sampling_frequency_input_and_moire_add_up_to_it():
    rows_lp_mm = 2000 / (np.sqrt(3) * 10)
    for given in (60.0, 75.0, 100.0):
        seen = lattice.alias(frequency_lp_mm=given, direction_deg=90.0, pitch_um=10.0)
        assert given + seen.frequency_lp_mm == pytest.approx(rows_lp_mm, rel=1e-12)
        assert seen.direction_deg == pytest.approx(90.0)


def test_area_law_against_counting_a_lattice():
    grid = np.array([(i, j) for i in range(-130, 131) for j in range(-130, 131)]) @ ROWS
    for ratio in (20.0, 50.0, 100.0):
        counted = (np.linalg.norm(grid, axis=1) <= ratio / 2).sum()
        law = lattice.core_count(diameter_mm=ratio * 0.01, pitch_um=10.0)
        assert law == pytest.approx(counted, rel=0.03)
    assert counted == 9061


def test_cycles_across_grow_with_the_root_of_the_cores():
    count = lattice.core_count(diameter_mm=2.0, pitch_um=8.0)
    cycles = 2.0 * lattice.resolution_limit_lp_mm(pitch_um=8.0, direction_deg=30.0)
    assert cycles / np.sqrt(count) == pytest.approx(0.606, abs=5e-4)


def test_a_cell_never_holds_less_than_one_core():
    at = np.array([1.0, 10.0, 46.53, 46.54, 500.0])
    cores = lattice.cell_core_count(frequency_lp_mm=at, pitch_um=10.0)
    assert (np.diff(cores) <= 0).all()
    assert cores[-1] == 1.0
    cell_mm2, core_mm2 = (1 / 20.0) ** 2, np.sqrt(0.75) * 0.01**2
    assert cores[1] == pytest.approx(cell_mm2 / core_mm2)
    assert lattice.cell_pixel_count(frequency_lp_mm=1e4, pixel_um=2.0) == 1.0


def test_touching_cores_fill_the_hexagonal_fraction():
    assert lattice.core_area_fraction(core_um=1.0, pitch_um=1.0) == pytest.approx(0.9069, abs=5e-5)


def test_refusals():
    with pytest.raises(OutOfRange, match="pitch_um is 0; it must be above 0"):
        lattice.resolution_limit_lp_mm(pitch_um=0.0, direction_deg=0.0)
    with pytest.raises(OutOfRange, match="frequency_lp_mm is -3; it must be 0 or more"):
        lattice.alias(frequency_lp_mm=-3.0, direction_deg=0.0, pitch_um=1.0)
