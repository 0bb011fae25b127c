import numpy as np
import pytest

from optics.image import coupled, crosstalk, modes
from optics.spec import OutOfRange

FIBER = {
    "core_um": 2.0,
    "pitch_um": 3.2,
    "na": 0.39,
    "core_index": 1.4977,
    "core_spread_fraction": 0.05,
    "wavelength_nm": 550.0,
    "length_m": 1.0,
    "cone_sine": 0.125,
}


def _contrast(shares, direction_deg=30.0):
    limit = 1 / np.sqrt(3) if direction_deg == 30.0 else 2 / 3
    return coupled.ring_mtf(shares=shares, frequency_per_um=limit / 3.2, pitch_um=3.2, direction_deg=direction_deg)


def test_rings_hold_all_cores_within_reach():
    rings = coupled.rings()
    assert [len(ring) for ring in rings[:5]] == [1, 6, 6, 6, 12]
    for ring in rings:
        assert np.allclose(np.linalg.norm(ring, axis=1), np.linalg.norm(ring[0]))
    assert sum(map(len, rings)) == 127


def test_shares_add_up_to_no_more_than_all_light():
    shares = coupled.table_shares(coupling_over_spread=np.geomspace(1e-4, 10, 60))
    total = shares @ [len(ring) for ring in coupled.rings()]
    assert (shares >= 0).all()
    assert (total <= 1.0005).all()
    assert (total[:30] > 0.995).all()


@pytest.mark.parametrize(("ratio", "near"), [(0.02, 0.25), (0.07, 0.12), (0.3, 0.12)])
def test_table_against_a_fresh_smaller_solution(ratio, near):
    fresh = coupled.solve_rings(coupling_over_spread=ratio, size=15, draws=12, seed=99)
    table = coupled.table_shares(coupling_over_spread=ratio)
    assert table[0] == pytest.approx(fresh[0], abs=0.025)
    assert table[1] == pytest.approx(fresh[1], rel=near)


@pytest.mark.slow
def test_table_against_a_fresh_large_solution():
    for ratio in (0.1, 0.37276):
        fresh = coupled.solve_rings(coupling_over_spread=ratio, size=31, draws=12, seed=7)
        table = coupled.table_shares(coupling_over_spread=ratio)
        assert table[0] == pytest.approx(fresh[0], abs=0.006)
        assert table[1:6] == pytest.approx(fresh[1:6], rel=0.04, abs=2e-4)


def test_the_solver_is_seeded_and_the_seed_matters():
    one, same, other = (
        coupled.solve_rings(coupling_over_spread=0.1, size=13, draws=2, seed=seed) for seed in (1, 1, 2)
    )
    assert (one == same).all()
    assert (one != other).any()


def test_the_solver_against_propagating_light():
    """Independent route: light sent down one small lattice, averaged over many lengths."""
    from scipy.linalg import expm

    rng = np.random.default_rng(3)
    size, ratio = 5, 0.4
    places = np.arange(size * size)
    row, column = places // size, places % size
    matrix = np.diag(rng.standard_normal(size * size) * np.sqrt(2))
    for di, dj in ((1, 0), (0, 1), (1, -1)):
        other = (row + di) % size * size + (column + dj) % size
        matrix[places, other] = matrix[other, places] = ratio
    step = expm(1j * 7.3 * matrix)
    light, mean = np.eye(size * size, dtype=complex), np.zeros((size * size, size * size))
    for _ in range(6000):
        light = step @ light
        mean += np.abs(light) ** 2 / 6000
    power = np.linalg.eigh(matrix)[1] ** 2
    assert np.allclose(power @ power.T, mean, atol=0.02)


def test_weak_coupling_is_the_pair_law():
    for ratio in (1e-4, 1e-3, 5e-3):
        pair = crosstalk.mean_exchange(coupling_over_spread=ratio) / 2
        assert coupled.table_shares(coupling_over_spread=ratio)[1] == pytest.approx(pair, rel=0.03)


def test_where_the_pair_law_turns_negative_the_rings_do_not():
    pair = crosstalk.mean_exchange(coupling_over_spread=0.6) / 2
    limit = {"frequency_per_um": 0.0577, "pitch_um": 10.0, "direction_deg": 30.0}
    assert crosstalk.exchange_mtf(neighbor_share=pair, **limit) < 0
    assert coupled.ring_mtf(shares=coupled.table_shares(coupling_over_spread=0.6), **limit) > 0


@pytest.mark.parametrize("direction", [0.0, 11.0, 30.0])
def test_contrast_is_never_negative_and_falls_with_coupling(direction):
    shares = coupled.table_shares(coupling_over_spread=np.geomspace(1e-4, 10, 120))
    limit = 1 / (np.sqrt(3) * np.cos(np.deg2rad(direction - 30)))
    at = np.linspace(0, limit, 25) / 10.0
    left = coupled.ring_mtf(shares=shares[:, None, :], frequency_per_um=at, pitch_um=10.0, direction_deg=direction)
    assert left.min() >= 0
    assert left.max() <= 1.0005
    assert np.diff(left, axis=0).max() < 5e-4
    assert np.diff(left, axis=1).max() < 5e-3


def test_one_ring_is_the_pair_law_in_any_direction():
    shares = np.zeros(len(coupled.rings()))
    shares[:2] = 1 - 6 * 0.012, 0.012
    for direction in (0.0, 17.0, 30.0):
        given = {"frequency_per_um": np.linspace(0, 0.06, 9), "pitch_um": 10.0, "direction_deg": direction}
        pair = crosstalk.exchange_mtf(neighbor_share=0.012, **given)
        assert np.allclose(coupled.ring_mtf(shares=shares, **given), pair, atol=1e-9)


def test_a_single_mode_fiber_follows_the_exact_coupling():
    """Below V 2.405 only LP01 counts: r from the exact coupling and mismatch, through the table."""
    fiber = {"core_um": 1.3, "na": 0.35, "wavelength_nm": 633.0}
    clad = np.sqrt(1.49**2 - 0.35**2)
    kappa = crosstalk.coupling_per_um(pitch_um=3.5, clad_index=clad, **fiber)
    s = crosstalk.mismatch_per_um(clad_index=clad, core_spread_fraction=0.04, **fiber)
    got = coupled.ring_shares(
        pitch_um=3.5, core_index=1.49, core_spread_fraction=0.04, length_m=2.0, cone_sine=0.3, **fiber
    )
    assert np.allclose(got, coupled.table_shares(coupling_over_spread=kappa / s), atol=2e-3)


def test_several_modes_against_a_sum_written_out():
    """Independent route: each mode from the exact coupling, slopes of beta by differences, launch equal (a full cone)."""
    fiber = {**FIBER, "wavelength_nm": 500.0, "cone_sine": 0.39}
    clad = np.sqrt(fiber["core_index"] ** 2 - 0.39**2)
    wave, v = 2 * np.pi / 0.5, float(modes.v_number(core_um=2.0, na=0.39, wavelength_nm=500.0))

    def beta(core, azimuthal, radial):
        number = np.pi * core * 0.39 / 0.5
        w = modes.outside_number(v_number=number, azimuthal=azimuthal, radial=radial)
        return np.sqrt((wave * fiber["core_index"]) ** 2 - (number**2 - w**2) / (core / 2) ** 2)

    total, light = 0.0, 0.0
    for azimuthal, radial in modes.MODES:
        if modes.cutoff_v_number(azimuthal=azimuthal, radial=radial) < v:
            slope = (beta(2.001, azimuthal, radial) - beta(1.999, azimuthal, radial)) / 0.001
            for parity in (1,) if azimuthal == 0 else (1, -1):
                kappa = crosstalk.mode_coupling_per_um(
                    azimuthal=azimuthal,
                    radial=radial,
                    parity=parity,
                    core_um=2.0,
                    pitch_um=3.2,
                    na=0.39,
                    clad_index=clad,
                    wavelength_nm=500.0,
                )
                ratio = abs(kappa) / abs(slope * 0.05 / np.sqrt(2))
                total, light = total + 2 * coupled.table_shares(coupling_over_spread=ratio), light + 2
    assert coupled.ring_shares(**fiber)[:2] == pytest.approx((total / light)[:2], rel=0.06)


def test_random_sizes_rescue_the_image_and_red_light_loses_more():
    spread = coupled.ring_shares(**{**FIBER, "core_spread_fraction": np.array([0.0, 0.01, 0.03, 0.1])})
    assert (np.diff(_contrast(spread)) > 0).all()
    assert _contrast(spread)[0] < 0.02
    blue, green, red = _contrast(coupled.ring_shares(**{**FIBER, "wavelength_nm": np.array([450.0, 550.0, 650.0])}))
    assert blue > green
    assert blue > red


def test_published_magnitude_of_exchange():
    """Conde et al. (abstract): up to 15 % into the nearest neighbor at 632 nm, less in the blue."""
    shares = coupled.ring_shares(
        **{**FIBER, "core_spread_fraction": 0.01, "wavelength_nm": np.array([488.0, 632.0]), "cone_sine": 0.39}
    )
    over_own = shares[:, 1] / shares[:, 0]
    assert over_own[0] < over_own[1]
    assert 0.05 < over_own[1] < 0.25


def test_cores_of_6_um_at_na_05_have_none_worth_counting():
    glass = {"core_um": 6.0, "pitch_um": 8.0, "na": 0.5, "core_index": 1.6, "core_spread_fraction": 0.02}
    for cone in (0.1, 0.25, 0.5):
        shares = coupled.ring_shares(**{**FIBER, **glass, "cone_sine": cone})
        assert shares[0] > 0.995


def test_modes_left_out_above_the_list_hardly_exchange():
    """All guided modes at V 17, solved one by one, equally filled: what leaves the core is below 2 %."""
    v, ratio, sigma = 17.0, 2 * 8.0 / 6.0, 0.02
    stays = light = 0.0
    for azimuthal in range(16):
        for radial in range(1, 7):
            if modes.cutoff_v_number(azimuthal=azimuthal, radial=radial) < v - 1e-3:
                w = modes.outside_number(v_number=v, azimuthal=azimuthal, radial=radial)
                outside, far = modes.scaled_k(azimuthal, w)[0], w * ratio
                zero, twice = (modes.scaled_k(order, far)[0] for order in (0, 2 * azimuthal))
                for lobes in (zero,) if azimuthal == 0 else (zero + twice, twice - zero):
                    r = np.sqrt(2) * lobes * np.exp(2 * w - far) / (v * v * sigma * outside**2)
                    stays, light = stays + 2 * coupled.table_shares(coupling_over_spread=r)[0], light + 2
    assert stays / light > 0.98


def test_short_lengths_have_not_yet_exchanged():
    lengths = np.array([0.0, 1e-6, 1e-5, 1e-4, 1e-3, 0.1, 10.0])
    own = coupled.ring_shares(**{**FIBER, "length_m": lengths})[:, 0]
    assert own[0] == 1.0
    assert (np.diff(own) <= 1e-15).all()
    assert own[-1] == own[-2]


def test_growth_with_length_against_averaging_over_mismatches():
    """Independent route: mean of kappa^2/(kappa^2 + d^2) sin^2(L sqrt(kappa^2 + d^2)) over a wide normal mismatch d."""
    kappa, s = 1.0, 1000.0
    d = np.linspace(-6 * s, 6 * s, 2_000_001)
    weight = np.exp(-0.5 * (d / s) ** 2)
    for turns in (0.2, 0.6, 0.95):
        crossed = kappa**2 / (kappa**2 + d**2) * np.sin(turns / 2 * np.sqrt(kappa**2 + d**2) / kappa) ** 2
        share = (crossed * weight).sum() / weight.sum()
        final = crosstalk.mean_exchange(coupling_over_spread=kappa / s) / 2
        assert coupled._settled(np.array(turns)) == pytest.approx(share / final, rel=0.03)


def test_one_design_equals_its_place_among_many():
    rng = np.random.default_rng(1)
    pitch = rng.uniform(3.0, 12.0, (20, 1))
    many = {**FIBER, "pitch_um": pitch, "core_um": pitch * 0.7, "wavelength_nm": np.linspace(420.0, 680.0, 5)}
    batch = coupled.ring_shares(**many)
    assert batch.shape == (20, 5, len(coupled.rings()))
    for k in (0, 7, 19):
        one = coupled.ring_shares(**{**many, "pitch_um": pitch[k, 0], "core_um": 0.7 * pitch[k, 0]})
        assert np.allclose(one, batch[k], rtol=1e-12, atol=1e-15)


def test_extremes_stay_finite():
    shares = coupled.ring_shares(
        **{**FIBER, "core_um": np.array([0.3, 1.0, 100.0]), "pitch_um": np.array([0.4, 1.02, 101.0])}
    )
    assert np.isfinite(shares).all()
    assert (shares >= 0).all()


def test_refusals():
    with pytest.raises(OutOfRange, match=r"na is 1\.6; it must be below core_index"):
        coupled.ring_shares(**{**FIBER, "na": 1.6})
    with pytest.raises(OutOfRange, match="pitch_um is 2; it must be above core_um"):
        coupled.ring_shares(**{**FIBER, "pitch_um": 2.0})
    with pytest.raises(OutOfRange, match="size is 12; it must be above 12"):
        coupled.solve_rings(coupling_over_spread=0.1, size=12, draws=1, seed=1)
