"""Oil samples as the laboratory reported them: every number keeps its text and its cell."""

from dataclasses import dataclass, field
from datetime import date

from rca.base.source import Source


@dataclass(frozen=True, slots=True, kw_only=True)
class OilValue:
    """One result: operator and value in the canonical unit of its property.

    ``op`` is "=", "<", ">" or "~"; a value below detection is ("<", limit), never a number.
    """

    property: str  # canonical name, or an element symbol
    op: str
    value: float
    unit: str
    text: str
    source: Source
    basis: str = ""  # mass, volume, count; as far as the report says
    method: str = ""  # as written, e.g. "ASTM D664"
    note: str = ""  # what the reader did to the text: unit converted, mark stripped, ...


@dataclass(frozen=True, slots=True, kw_only=True)
class OilSample:
    """One sample of one bottle."""

    id: str
    sampled: date | None
    point: str
    laboratory: str
    machine_hours: float | None
    oil_hours: float | None
    new_oil: bool
    values: dict[str, OilValue] = field(default_factory=dict)
    excluded: str = ""  # the reason, where it is set aside on purpose
    source: Source = field(default_factory=lambda: Source(file="", locator=""))
    received: date | None = None
    reported: date | None = None
    revision: int = 0
    retest: int = 0  # 1, 2, ... for repeated tests of one bottle
    top_up: float | None = None  # [m3] added since the sample before, where the report says
    fluid: str = ""
    asset: str = ""  # where the report names the machine

    def get(self, name: str) -> float | None:
        """The number of an uncensored result, else None."""
        found = self.values.get(name)
        return found.value if found is not None and found.op in ("=", "~") else None


@dataclass(frozen=True, slots=True, kw_only=True)
class UnreadCell:
    """A cell of a report that is kept and shown, and not used."""

    source: Source
    text: str
    reason: str
