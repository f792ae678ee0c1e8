"""The incidents most like one, and why: which signs and conditions they share and which not.

No trained model: a sum anyone can follow. Two incidents are held together feature by feature, and
only features looked at in both count.

- A sign (two states) counts with the bits its agreement carries: log2(1/s), s the share of the
  incidents looked at that show the same. A rare sign seen in both says more than a common one. A
  disagreement counts against with the mean of the bits of both states.
- A condition counts one bit: words agree or do not; numbers agree by how near they are, fully
  where equal, not at all a stated step apart.

    likeness = agreeing bits / (compared bits + DOUBT)

``DOUBT`` keeps two incidents that share the one thing looked at in both from coming out on top.
What was concluded (side, mechanism, cause) does not enter: alike in what was seen, then see what
each turned out to be. After Gower, Biometrics 27 (1971) 857 (features missing in one left out).
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from rca.compare.table import IncidentTable

FloatArray = npt.NDArray[np.float64]
DOUBT = 4.0  # [bit]; own choice, about two common signs' worth
CHUNK = 1024
# A ratio apart (given as its natural logarithm), or a difference, at which nothing agrees.
_RATIO = {
    "discharge pressure": np.log(2.0),
    "shaft speed": np.log(2.0),
    "displacement": np.log(4.0),
    "viscosity at 40 °C": np.log(2.0),
    "oil volume": np.log(4.0),
}
_DIFFERENCE = {"oil temperature": 20.0, "altitude": 1000.0}  # [K], [m]


@dataclass(frozen=True, slots=True, kw_only=True)
class Feature:
    """One thing two incidents were held together by."""

    name: str
    agreed: float  # [bit]
    compared: float  # [bit]
    words: str  # "seen in both", "seen in one only", "looked for and absent in both", ...


@dataclass(frozen=True, slots=True, kw_only=True)
class Likeness:
    """One incident held against another."""

    row: int
    other: int
    score: float  # 0..1
    agreed: float
    compared: float
    features: tuple[Feature, ...]  # agreeing first, the weightiest first

    @property
    def shared(self) -> tuple[Feature, ...]:
        """What both have."""
        return tuple(f for f in self.features if f.agreed > 0)

    @property
    def different(self) -> tuple[Feature, ...]:
        """What tells them apart, the weightiest first."""
        rest = [f for f in self.features if f.agreed < f.compared]
        return tuple(sorted(rest, key=lambda f: -(f.compared - f.agreed)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Bits:
    """Bits of each sign's two states among the incidents that looked."""

    seen: FloatArray  # [signs]
    absent: FloatArray


def bits(table: IncidentTable) -> Bits:
    """Bits from the shares in the table, with one of each added so that none is certain."""
    seen, absent = (table.signs > 0).sum(axis=0), (table.signs < 0).sum(axis=0)
    looked = seen + absent + 2.0
    return Bits(seen=np.log2(looked / (seen + 1.0)), absent=np.log2(looked / (absent + 1.0)))


def likeness_to(table: IncidentTable, row: int) -> tuple[FloatArray, FloatArray]:
    """Score and compared bits of every incident against one, each of shape [n]."""
    agreed, compared = _block(table, bits(table), np.array([row]))
    return (agreed / (compared + DOUBT))[0], compared[0]


def most_like(table: IncidentTable, row: int, *, count: int = 5) -> tuple[Likeness, ...]:
    """The incidents most like one, best first; those with nothing compared are left out."""
    score, compared = likeness_to(table, row)
    score[row] = -1.0
    order = [int(k) for k in np.argsort(-score, kind="stable")[:count] if score[k] > 0]
    weights = bits(table)
    return tuple(
        Likeness(
            row=row,
            other=k,
            score=float(score[k]),
            agreed=float(score[k] * (compared[k] + DOUBT)),
            compared=float(compared[k]),
            features=_features(table, weights, row, k),
        )
        for k in order
    )


def neighbours(table: IncidentTable, *, count: int = 5) -> tuple[npt.NDArray[np.intp], FloatArray]:
    """The nearest of every incident and their scores, [n, count]; -1 and 0 where there are fewer.

    Costs n squared; ten thousand take some seconds.
    """
    n = len(table)
    width = min(count, max(n - 1, 0))
    nearest = np.full((n, count), -1, dtype=np.intp)
    scores = np.zeros((n, count))
    weights = bits(table)
    for start in range(0, n, CHUNK):
        rows = np.arange(start, min(start + CHUNK, n))
        agreed, compared = _block(table, weights, rows)
        score = agreed / (compared + DOUBT)
        score[np.arange(rows.size), rows] = -1.0
        if width == 0:
            continue
        top = np.argpartition(-score, width - 1, axis=1)[:, :width]
        found = np.take_along_axis(score, top, axis=1)
        order = np.argsort(-found, axis=1, kind="stable")
        found = np.take_along_axis(found, order, axis=1)
        top = np.take_along_axis(top, order, axis=1)
        nearest[rows, :width] = np.where(found > 0, top, -1)
        scores[rows, :width] = np.maximum(found, 0.0)
    return nearest, scores


def _block(
    table: IncidentTable, weights: Bits, rows: npt.NDArray[np.intp]
) -> tuple[FloatArray, FloatArray]:
    """Agreed and compared bits of some incidents against all, [rows, n]."""
    seen = (table.signs > 0).astype(np.float32)
    absent = (table.signs < 0).astype(np.float32)
    mean = ((weights.seen + weights.absent) / 2).astype(np.float32)
    both_seen = (seen[rows] * weights.seen.astype(np.float32)) @ seen.T
    both_absent = (absent[rows] * weights.absent.astype(np.float32)) @ absent.T
    apart = (seen[rows] * mean) @ absent.T + (absent[rows] * mean) @ seen.T
    agreed = (both_seen + both_absent).astype(float)
    compared = agreed + apart
    for k in range(len(table.word_names)):
        names, codes = np.unique(table.words[:, k], return_inverse=True)
        known = (names != "")[codes]
        both = known[rows][:, None] & known[None, :]
        compared += both
        agreed += both & (codes[rows][:, None] == codes[None, :])
    for k, name in enumerate(table.number_names):
        near = _near(name, table.numbers[rows, k][:, None], table.numbers[:, k][None, :])
        known = np.isfinite(near)
        compared += known
        agreed += np.nan_to_num(near)
    return agreed, compared


def _near(name: str, one: FloatArray, other: FloatArray) -> FloatArray:
    """Agreement of two numbers, 1 where equal to 0 a step apart; NaN where one is missing."""
    if name in _DIFFERENCE:
        apart = np.abs(one - other) / _DIFFERENCE[name]
    else:
        with np.errstate(divide="ignore", invalid="ignore"):
            apart = np.abs(np.log(one) - np.log(other)) / _RATIO.get(name, np.log(2.0))
    return np.asarray(np.maximum(1.0 - apart, 0.0))


_WORDS: Mapping[tuple[int, int], str] = {
    (1, 1): "seen in both",
    (-1, -1): "looked for and absent in both",
    (1, -1): "seen here, absent there",
    (-1, 1): "absent here, seen there",
}


def _features(table: IncidentTable, weights: Bits, row: int, other: int) -> tuple[Feature, ...]:
    found = []
    for k, name in enumerate(table.sign_names):
        pair = (int(table.signs[row, k]), int(table.signs[other, k]))
        if pair not in _WORDS:
            continue
        same = pair[0] == pair[1]
        size = weights.seen[k] if pair[0] > 0 else weights.absent[k]
        if not same:
            size = (weights.seen[k] + weights.absent[k]) / 2
        size = float(size)
        found.append(
            Feature(name=name, agreed=size if same else 0.0, compared=size, words=_WORDS[pair])
        )
    found += [f for k in range(len(table.word_names)) if (f := _word(table, k, row, other))]
    found += [f for k in range(len(table.number_names)) if (f := _number(table, k, row, other))]
    return tuple(sorted(found, key=lambda f: (-f.agreed, f.name)))


def _word(table: IncidentTable, k: int, row: int, other: int) -> Feature | None:
    one, two = str(table.words[row, k]), str(table.words[other, k])
    if not (one and two):
        return None
    words = one if one == two else f"{one} here, {two} there"
    return Feature(name=table.word_names[k], agreed=float(one == two), compared=1.0, words=words)


def _number(table: IncidentTable, k: int, row: int, other: int) -> Feature | None:
    name = table.number_names[k]
    one, two = table.numbers[row, k], table.numbers[other, k]
    near = float(_near(name, np.array([one]), np.array([two]))[0])
    if not np.isfinite(near):
        return None
    return Feature(
        name=name,
        agreed=near,
        compared=1.0,
        words=f"{field_words(name, float(one))} here, {field_words(name, float(two))} there",
    )


def field_words(name: str, value: float) -> str:
    """A condition's number in the unit people use."""
    factor, unit, digits = {
        "discharge pressure": (1e-5, "bar(a)", 0),
        "shaft speed": (60.0, "rpm", 0),
        "displacement": (1e6, "cm³/rev", 0),
        "viscosity at 40 °C": (1e6, "mm²/s", 1),
        "oil volume": (1e3, "L", 0),
        "altitude": (1.0, "m", 0),
        "oil temperature": (1.0, "°C", 0),
    }[name]
    shown = value - 273.15 if name == "oil temperature" else value * factor
    return f"{shown:.{digits}f} {unit}"


def same_finding(table: IncidentTable, row: int) -> FloatArray:
    """How far each incident's mechanisms overlap with one's, [n], 0 to 1.

    The sum of the smaller probabilities over the sum of the larger. It compares conclusions, so it
    serves only where nothing seen can be compared.
    """
    one, all_ = np.nan_to_num(table.mechanisms[row]), np.nan_to_num(table.mechanisms)
    larger = np.maximum(one, all_).sum(axis=1)
    smaller = np.minimum(one, all_).sum(axis=1)
    return np.asarray(np.divide(smaller, larger, out=np.zeros(len(table)), where=larger > 0))
