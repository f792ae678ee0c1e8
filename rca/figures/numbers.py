"""Numbers for people: field units, as many digits as the uncertainty allows."""

import math
from datetime import UTC, datetime


def bar(pascal: float, *, digits: int = 2) -> str:
    """A pressure or difference in bar."""
    return f"{pascal / 1e5:.{digits}f}".replace("-", "\u2212")


def with_u(value: float, u: float | None, *, scale: float = 1.0) -> str:
    """A value and its standard uncertainty with two significant digits of the latter."""
    x = value * scale
    if u is None or u <= 0 or not math.isfinite(u):
        return f"{x:.3g}".replace("-", "\u2212")
    spread = u * scale
    places = max(0, 1 - math.floor(math.log10(spread)))
    return f"{x:.{places}f} \u00b1 {spread:.{places}f}".replace("-", "\u2212")


def share(p: float) -> str:
    """A probability with two decimals; never 0.00 or 1.00."""
    if p < 0.005:
        return "< 0.01"
    return "> 0.99" if p > 0.995 else f"{p:.2f}"


def celsius(kelvin: float) -> str:
    """A temperature in degrees Celsius, whole."""
    return f"{kelvin - 273.15:.0f}".replace("-", "\u2212")


def ratio(x: float) -> str:
    """A likelihood ratio with two significant digits."""
    return f"{x:.2g}" if x < 100 else f"{x:.0f}"


def moment(seconds: float) -> str:
    """A moment in UTC to the minute."""
    return datetime.fromtimestamp(seconds, tz=UTC).strftime("%Y-%m-%d %H:%M")


def day(seconds: float) -> str:
    """A day in UTC."""
    return datetime.fromtimestamp(seconds, tz=UTC).strftime("%Y-%m-%d")


_PLAIN = (
    ("degC", "\u00b0C"),
    ("mm2/s", "mm\u00b2/s"),
    ("m2/s", "m\u00b2/s"),
    ("cm3", "cm\u00b3"),
    ("kg/m3", "kg/m\u00b3"),
    ("+/-", "\u00b1"),
)


def written(text: str) -> str:
    """A quantity as a reader expects it: units with their signs; the value untouched."""
    for plain, shown in _PLAIN:
        text = text.replace(plain, shown)
    return text
