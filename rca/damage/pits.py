"""Pits on a marked region of a photograph: count, area share, equivalent diameters.

The region is a grey picture of a surface lit evenly enough that pits are darker than the plate.
A smooth plate is fitted as a quadratic in x and y; what lies darker than half the typical depth
is a pit. Half depth is where an edge blurred alike on both sides keeps its place. How far the
answer hangs on that choice is part of the uncertainty: it is measured again at 35 % and 65 %.
"""

import re
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import ndimage
from skimage.color import rgb2lab

from rca.base.errors import OutOfRangeError

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]
SMALLEST_REGION_PX = 400
SHARES = (0.35, 0.5, 0.65)  # of the typical depth
SEED_SIGMAS = 5.0  # darker than the plate by this many robust deviations counts as dark
SMALLEST_PIT_PX = 4.0  # equivalent diameter; smaller spots are not told from grain
MOST_UNEVEN = 3.0  # plate deviation against pixel-to-pixel grain; judgement
MOST_DARK = 0.45  # of the region; judgement
_BREADTH = 1.4826  # median absolute deviation to standard deviation of a normal law
_SCALE = re.compile(r"^\s*(\d+(?:[.,]\d+)?)\s*px\s*/\s*mm\s*$", re.IGNORECASE)


@dataclass(frozen=True, slots=True, kw_only=True)
class PitField:
    """Pits of one region; lengths in metres, every ``u_`` a standard uncertainty."""

    count: int  # whole pits and pits cut by the region's border
    u_count: float
    cut_by_border: int  # counted, but without a diameter
    area_share: float  # of the region [-]
    u_area_share: float
    diameters: tuple[float, ...]  # equivalent diameters of whole pits, ascending [m]
    median_diameter: float | None  # [m]; None without a whole pit
    u_median_diameter: float | None
    largest_diameter: float | None  # [m]
    region_area: float  # [m2]
    smallest_seen: float  # [m]; smaller pits are not counted


@dataclass(frozen=True, slots=True)
class _Look:
    count: int
    cut: int
    share: float
    diameters: FloatArray  # [px]


def measure_pits(
    grey: npt.ArrayLike,
    *,
    px_per_m: float,
    u_px_per_m: float = 0.0,
    region: BoolArray | None = None,
) -> PitField:
    """Pits of a grey picture (H, W), any brightness scale, bright plate and dark pits.

    ``px_per_m`` is the scale with its standard uncertainty; ``region`` (H, W) marks where to look.
    Touching pits count as one, so in dense fields the count errs low and the diameters high;
    shadows, stains and scratches count as pits, so the region has to be marked by a person.

    Raises
    ------
    OutOfRangeError
        The picture is no plane of finite numbers, the region is too small or of another shape,
        the scale is not positive, or the region is not mostly one evenly lit surface (a port,
        an edge or a shadow inside it): a background can't be told from pits then.

    """
    picture = np.asarray(grey, dtype=np.float64)
    marked = _region(picture, region)
    if not (np.isfinite(px_per_m) and px_per_m > 0 and 0 <= u_px_per_m < px_per_m):
        raise OutOfRangeError(
            f"a scale of {px_per_m} px/m with uncertainty {u_px_per_m}; it has to be positive"
        )
    depth, sigma = _depth(picture, marked)
    _even_plate(picture, marked, depth, sigma)
    looks = [_look(depth, sigma, marked, share) for share in SHARES]
    low, middle, high = looks
    sizes = np.sort(middle.diameters) / px_per_m
    median = float(np.median(sizes)) if sizes.size else None
    return PitField(
        count=middle.count,
        u_count=_spread(low.count, middle.count, high.count),
        cut_by_border=middle.cut,
        area_share=middle.share,
        u_area_share=_spread(low.share, middle.share, high.share),
        diameters=tuple(float(d) for d in sizes),
        median_diameter=median,
        u_median_diameter=None
        if median is None
        else _u_median(looks, median, px_per_m, u_px_per_m),
        largest_diameter=float(sizes[-1]) if sizes.size else None,
        region_area=float(marked.sum()) / px_per_m**2,
        smallest_seen=SMALLEST_PIT_PX / px_per_m,
    )


def scale_stated(text: str) -> float | None:
    """Pixels a metre from a stated scale such as "12.5 px/mm"; None where it states none."""
    found = _SCALE.match(text)
    value = float(found.group(1).replace(",", ".")) if found else 0.0
    return value * 1e3 if value > 0 else None


def scale_from_bar(
    first: tuple[float, float], last: tuple[float, float], *, length_m: float, u_px: float = 1.0
) -> tuple[float, float]:
    """Pixels a metre and standard uncertainty from both ends (x, y) [px] of a bar of known length.

    ``u_px`` is the standard uncertainty of placing one end. Right only in the plane of the bar and
    seen square on; a tilted surface looks shorter, so pits then come out too small.

    Raises
    ------
    OutOfRangeError
        The bar has no length.

    """
    pixels = float(np.hypot(last[0] - first[0], last[1] - first[1]))
    if not (np.isfinite(pixels) and pixels > 0 and np.isfinite(length_m) and length_m > 0):
        raise OutOfRangeError(
            f"a scale bar of {pixels} px and {length_m} m; both must be positive"
        )
    return pixels / length_m, float(np.sqrt(2.0) * u_px / length_m)


def patch_colour(rgb: npt.ArrayLike, *, patch: BoolArray, white: BoolArray) -> float:
    """Colour difference (CIE 1976, dE) of a patch from a white field in the same picture.

    ``rgb`` (H, W, 3) in 0..255; both masks (H, W). Each channel is scaled so that the white field
    becomes white. Indicative only: no calibrated light, no spectrometer; ASTM D7843 it is not.

    Raises
    ------
    OutOfRangeError
        A mask is empty or of another shape, or the white field is dark or saturated.

    """
    picture = np.asarray(rgb, dtype=np.float64)
    fits = picture.ndim == 3 and picture.shape[2] == 3
    if not fits or patch.shape != picture.shape[:2] or white.shape != picture.shape[:2]:
        raise OutOfRangeError(f"a picture of shape {picture.shape}; it has to be (H, W, 3)")
    if not patch.any() or not white.any() or not np.isfinite(picture).all():
        raise OutOfRangeError("an empty patch, an empty white field or a pixel without a value")
    reference = np.median(picture[white], axis=0)
    if reference.min() < 100 or reference.max() >= 255:
        raise OutOfRangeError(
            f"a white field at {reference.round().tolist()}; each channel has to lie in 100..254"
        )
    seen = np.clip(np.median(picture[patch], axis=0) / reference, 0.0, 1.0)
    white_lab, seen_lab = rgb2lab(np.stack([np.ones(3), seen])[None])[0]
    return float(np.linalg.norm(seen_lab - white_lab))


def _region(picture: FloatArray, region: BoolArray | None) -> BoolArray:
    if picture.ndim != 2:
        raise OutOfRangeError(f"a picture of shape {picture.shape}; it has to be grey, (H, W)")
    marked = np.ones(picture.shape, dtype=np.bool_) if region is None else region.astype(np.bool_)
    if marked.shape != picture.shape:
        raise OutOfRangeError(f"a region of shape {marked.shape} on a picture {picture.shape}")
    if int(marked.sum()) < SMALLEST_REGION_PX:
        raise OutOfRangeError(f"a region of {int(marked.sum())} px; at least {SMALLEST_REGION_PX}")
    if not np.isfinite(picture[marked]).all():
        raise OutOfRangeError("a pixel without a value inside the region")
    return marked


def _depth(picture: FloatArray, marked: BoolArray) -> tuple[FloatArray, float]:
    """How much darker than the smooth plate (H, W), and the plate's robust deviation."""
    y, x = np.indices(picture.shape, dtype=np.float64)
    x, y = x / picture.shape[1] - 0.5, y / picture.shape[0] - 0.5
    terms = np.stack([np.ones_like(x), x, y, x * x, x * y, y * y], axis=-1)
    kept = marked.copy()
    depth = np.zeros_like(picture)
    sigma = 0.0
    for _ in range(8):
        factors = np.linalg.lstsq(terms[kept], picture[kept], rcond=None)[0]
        depth = terms @ factors - picture
        middle = float(np.median(depth[kept]))
        sigma = _BREADTH * float(np.median(np.abs(depth[kept] - middle)))
        kept = marked & (depth - middle < 3.0 * max(sigma, 1e-9))
    return depth, sigma


def _even_plate(picture: FloatArray, marked: BoolArray, depth: FloatArray, sigma: float) -> None:
    """Refuse a region whose plate is no plate: rough far beyond its grain, or mostly dark."""
    grain = max(
        _BREADTH * float(np.median(np.abs(np.diff(picture, axis=axis)))) / np.sqrt(2.0)
        for axis in (0, 1)
    )
    span = float(np.ptp(picture[marked]))
    dark = float((depth[marked] > 0.2 * span).mean()) if span > 0 else 0.0
    if sigma > max(MOST_UNEVEN * grain, 0.05 * span) or dark > MOST_DARK:
        raise OutOfRangeError(
            f"a region that is not mostly one evenly lit surface (deviation {sigma:.3g} against a "
            f"grain of {grain:.3g}; {dark:.0%} dark, at most {MOST_DARK:.0%}); mark a smaller one"
        )


def _look(depth: FloatArray, sigma: float, marked: BoolArray, share: float) -> _Look:
    dark = marked & (depth > SEED_SIGMAS * max(sigma, 1e-9))
    # a lone pixel of noise is no seed: it has to have dark neighbours
    seeds = ndimage.binary_opening(dark, structure=np.ones((2, 2)))
    if not seeds.any():
        return _Look(0, 0, 0.0, np.empty(0))
    deep = depth[seeds]
    # the floor of the pits, without the skirts of their blurred edges
    typical = float(np.median(deep[deep > 0.5 * np.percentile(deep, 90)]))
    pits = marked & (depth > max(share * typical, 3.0 * sigma))
    labels, number = ndimage.label(pits)
    index = np.arange(1, number + 1)
    areas = np.asarray(ndimage.sum_labels(pits, labels, index))
    diameters = np.sqrt(4.0 * areas / np.pi)
    seeded = np.asarray(ndimage.maximum(seeds, labels, index)).astype(np.bool_)
    counted = (diameters >= SMALLEST_PIT_PX) & seeded
    inner = ndimage.binary_erosion(marked)  # outside the picture counts as outside the region
    cut = np.isin(index, np.unique(labels[marked & ~inner]))
    return _Look(
        int(counted.sum()),
        int((counted & cut).sum()),
        float(areas[counted].sum()) / float(marked.sum()),
        diameters[counted & ~cut],
    )


def _spread(low: float, middle: float, high: float) -> float:
    """Standard uncertainty of a result that may lie anywhere between the looks (rectangular)."""
    return float(max(abs(low - middle), abs(high - middle)) / np.sqrt(3.0))


def _u_median(looks: list[_Look], median: float, px_per_m: float, u_px_per_m: float) -> float:
    medians = [
        float(np.median(one.diameters)) / px_per_m if one.diameters.size else median
        for one in looks
    ]
    pixel = 1.0 / px_per_m / np.sqrt(12.0)
    return float(
        np.sqrt(_spread(*medians) ** 2 + (median * u_px_per_m / px_per_m) ** 2 + pixel**2)
    )
