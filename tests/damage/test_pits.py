"""Pits measured on synthetic plates whose pits are known by construction."""

import numpy as np
import numpy.typing as npt
import pytest
from scipy import ndimage

from rca.base.errors import OutOfRangeError
from rca.damage.pits import measure_pits, patch_colour, scale_from_bar, scale_stated

PX_PER_M = 20e3


def plate(
    radii_px: npt.ArrayLike, *, blur: float = 1.2, noise: float = 3.0, seed: int = 1
) -> npt.NDArray[np.float64]:
    """A lit plate with one round pit in each cell of a grid, pits of the given radii."""
    radii = np.asarray(radii_px, dtype=np.float64)
    side, cell = int(np.ceil(np.sqrt(radii.size))), 60
    rng = np.random.default_rng(seed)
    y, x = np.indices((side * cell, side * cell), dtype=np.float64)
    pits = np.zeros_like(x)
    for k, r in enumerate(radii):
        cx, cy = (k % side + 0.5) * cell, (k // side + 0.5) * cell
        pits += 1.0 * (np.hypot(x - cx - rng.uniform(-3, 3), y - cy - rng.uniform(-3, 3)) < r)
    light = 160 + 20 * x / x.max() - 12 * y / y.max()
    picture = light - 100 * ndimage.gaussian_filter(pits, blur)
    return np.asarray(picture + rng.normal(0, noise, x.shape))


@pytest.mark.outside_value(source="exact: area and diameter of circles drawn by the test")
@pytest.mark.parametrize("noise", [0.0, 2.0, 6.0])
def test_known_pits_are_recovered(noise: float) -> None:
    radii = np.random.default_rng(7).uniform(5, 20, 49)
    picture = plate(radii, noise=noise)
    found = measure_pits(picture, px_per_m=PX_PER_M)
    assert found.count == 49
    true_share = float(np.pi * np.sum(radii**2) / picture.size)
    assert found.area_share == pytest.approx(true_share, rel=0.04)
    assert abs(found.area_share - true_share) < 3 * found.u_area_share + 0.002
    true = np.sort(2 * radii) / PX_PER_M
    assert np.max(np.abs(np.asarray(found.diameters) - true)) < 1.0 / PX_PER_M  # one pixel
    assert found.median_diameter == pytest.approx(float(np.median(true)), rel=0.03)


@pytest.mark.parametrize("seed", range(5))
def test_a_clean_plate_has_no_pits(seed: int) -> None:
    found = measure_pits(_clean(seed), px_per_m=1e4)
    assert (found.count, found.area_share, found.median_diameter) == (0, 0.0, None)


def _clean(seed: int) -> npt.NDArray[np.float64]:
    light = np.linspace(120, 180, 400)[None, :] * np.ones((300, 1))
    return np.asarray(light + np.random.default_rng(seed).normal(0, 6, light.shape))


def test_only_the_marked_region_counts_and_cut_pits_have_no_diameter() -> None:
    picture = plate(np.full(16, 10.0), noise=1.0)
    left = np.zeros(picture.shape, dtype=bool)
    left[:, :120] = True
    assert measure_pits(picture, px_per_m=PX_PER_M, region=left).count == 8
    cut = np.zeros(picture.shape, dtype=bool)
    cut[:, :90] = True  # through the middle of the second column
    found = measure_pits(picture, px_per_m=PX_PER_M, region=cut)
    assert (found.count, found.cut_by_border, len(found.diameters)) == (8, 4, 4)


def test_diameters_go_with_the_scale_and_its_uncertainty() -> None:
    picture = plate(np.full(16, 10.0))
    fine = measure_pits(picture, px_per_m=PX_PER_M)
    coarse = measure_pits(picture, px_per_m=PX_PER_M / 2, u_px_per_m=PX_PER_M / 10)
    assert coarse.median_diameter == pytest.approx(2 * (fine.median_diameter or 0.0))
    assert (coarse.u_median_diameter or 0) >= 0.2 * (coarse.median_diameter or 0)


@pytest.mark.parametrize(
    ("grey", "scale"),
    [
        (np.full((50, 50), np.nan), 1e4),
        (np.zeros((5, 5)), 1e4),
        (np.zeros((50, 50, 3)), 1e4),
        (np.zeros((50, 50)), 0.0),
        (np.zeros((50, 50)), float("nan")),
    ],
)
def test_what_cannot_be_measured_is_refused(grey: npt.NDArray[np.float64], scale: float) -> None:
    with pytest.raises(OutOfRangeError):
        measure_pits(grey, px_per_m=scale)


def test_a_region_across_a_port_is_refused() -> None:
    picture = plate(np.full(16, 10.0))
    picture[:, :110] -= 110.0  # a dark port under nearly half of the region
    with pytest.raises(OutOfRangeError, match="evenly lit"):
        measure_pits(picture, px_per_m=PX_PER_M)


def test_scales() -> None:
    assert scale_stated("12.5 px/mm") == pytest.approx(12.5e3)
    assert scale_stated("12,5 px/mm") == pytest.approx(12.5e3)
    assert scale_stated("10 mm bar") is None
    assert scale_stated("0 px/mm") is None
    scale, u = scale_from_bar((10, 10), (130, 170), length_m=0.010)  # 3-4-5: 200 px
    assert scale == pytest.approx(20e3)
    assert u == pytest.approx(2**0.5 / 0.010)
    with pytest.raises(OutOfRangeError):
        scale_from_bar((1, 1), (1, 1), length_m=0.01)


@pytest.mark.outside_value(source="CIE 1976 L*a*b*: black lies 100 from white, white 0")
def test_patch_colour_of_black_and_white() -> None:
    rgb = np.full((20, 20, 3), (230.0, 220.0, 200.0))  # a warm light
    rgb[5:10, 5:10] = 0.0
    patch = np.zeros((20, 20), dtype=bool)
    patch[5:10, 5:10] = True
    assert patch_colour(rgb, patch=patch, white=~patch) == pytest.approx(100.0, abs=0.01)
    other = np.zeros_like(patch)
    other[12:15, 12:15] = True
    assert patch_colour(rgb, patch=other, white=~patch & ~other) == pytest.approx(0.0, abs=0.01)
    with pytest.raises(OutOfRangeError):
        patch_colour(rgb, patch=~patch, white=patch)
