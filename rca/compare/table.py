"""All incidents as arrays, one row an incident: what the calculations read."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from typing import Any

import numpy as np
import numpy.typing as npt

from rca.compare.incident import Incident, PastAction

FloatArray = npt.NDArray[np.float64]
SignArray = npt.NDArray[np.int8]
Rows = npt.NDArray[np.intp]
EPOCH = date(1970, 1, 1)
_ARRAYS = (
    *("invented", "days", "downtime_h", "cost", "mechanisms", "prior", "causes"),
    *("signs", "numbers", "words"),
)
_TEXTS = (
    *("ids", "titles", "sites", "assets", "machines", "sides", "knowledge", "main_causes"),
    *("currencies", "sources"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class IncidentTable:
    """n incidents. NaN means not recorded; a sign's 0 means nobody looked, or it leans no way."""

    ids: tuple[str, ...]
    titles: tuple[str, ...]
    sites: tuple[str, ...]
    assets: tuple[str, ...]
    machines: tuple[str, ...]  # see ``machine_names``
    sides: tuple[str, ...]
    knowledge: tuple[str, ...]
    main_causes: tuple[str, ...]
    currencies: tuple[str, ...]  # "" where no cost is stated
    sources: tuple[str, ...]
    invented: npt.NDArray[np.bool_]
    days: FloatArray  # [n] days since 1970-01-01
    downtime_h: FloatArray  # [n]
    cost: FloatArray  # [n] in the currency beside it
    mechanism_names: tuple[str, ...]
    mechanisms: FloatArray  # [n, mechanisms] probability that it took part
    prior: FloatArray  # [n, mechanisms]
    cause_names: tuple[str, ...]
    causes: FloatArray  # [n, causes]
    sign_names: tuple[str, ...]
    signs: SignArray  # [n, signs] +1 seen, -1 looked at and absent, 0 otherwise
    number_names: tuple[str, ...]
    numbers: FloatArray  # [n, numbers] SI
    word_names: tuple[str, ...]
    words: npt.NDArray[np.str_]  # [n, words] "" where not recorded
    actions: tuple[tuple[int, PastAction], ...] = ()  # row of the incident, action

    def __len__(self) -> int:
        return len(self.ids)

    def rows(self, mask: npt.NDArray[np.bool_] | Rows) -> "IncidentTable":
        """The same table with some incidents only."""
        index = np.arange(len(self))[mask]
        new_row = {int(old): new for new, old in enumerate(index)}
        changes: dict[str, Any] = {name: getattr(self, name)[index] for name in _ARRAYS}
        changes |= {name: tuple(getattr(self, name)[i] for i in index) for name in _TEXTS}
        changes["actions"] = tuple((new_row[r], a) for r, a in self.actions if r in new_row)
        return replace(self, **changes)

    def day(self, row: int) -> date | None:
        """The day an incident occurred."""
        value = self.days[row]
        return date.fromordinal(EPOCH.toordinal() + int(value)) if np.isfinite(value) else None


def table_of(incidents: tuple[Incident, ...]) -> IncidentTable:
    """The arrays of a sequence of incidents."""
    mechanisms = _names(i.mechanisms for i in incidents)
    causes = _names(i.causes for i in incidents)
    signs = _names(i.signs for i in incidents)
    numbers = _names(i.numbers for i in incidents)
    words = _names(i.words for i in incidents)
    return IncidentTable(
        ids=tuple(i.id for i in incidents),
        titles=tuple(i.title for i in incidents),
        sites=tuple(i.site for i in incidents),
        assets=tuple(i.asset for i in incidents),
        machines=machine_names([i.asset for i in incidents], [i.site for i in incidents]),
        sides=tuple(i.side for i in incidents),
        knowledge=tuple(i.knowledge for i in incidents),
        main_causes=tuple(i.main_cause for i in incidents),
        currencies=tuple(i.cost.currency if i.cost else "" for i in incidents),
        sources=tuple(i.source for i in incidents),
        invented=np.array([i.invented for i in incidents], dtype=bool),
        days=np.array(
            [(i.occurred - EPOCH).days if i.occurred else np.nan for i in incidents], dtype=float
        ),
        downtime_h=np.array(
            [np.nan if i.downtime_h is None else i.downtime_h for i in incidents], dtype=float
        ),
        cost=np.array([i.cost.amount if i.cost else np.nan for i in incidents], dtype=float),
        mechanism_names=mechanisms,
        mechanisms=_matrix([i.mechanisms for i in incidents], mechanisms),
        prior=_matrix([i.prior for i in incidents], mechanisms),
        cause_names=causes,
        causes=_matrix([i.causes for i in incidents], causes),
        sign_names=signs,
        signs=np.array(
            [[i.signs.get(s, 0) for s in signs] for i in incidents], dtype=np.int8
        ).reshape(len(incidents), len(signs)),
        number_names=numbers,
        numbers=_matrix([i.numbers for i in incidents], numbers),
        word_names=words,
        words=np.array(
            [[i.words.get(w, "") for w in words] for i in incidents], dtype=np.str_
        ).reshape(len(incidents), len(words)),
        actions=tuple((row, a) for row, i in enumerate(incidents) for a in i.actions),
    )


def machine_names(assets: Sequence[str], sites: Sequence[str]) -> tuple[str, ...]:
    """A name for each incident's machine; the site is added where two sites use one name."""
    places: dict[str, set[str]] = {}
    for asset, site in zip(assets, sites, strict=True):
        places.setdefault(asset, set()).add(site)
    return tuple(
        asset if len(places[asset]) == 1 else f"{asset}, {site}"
        for asset, site in zip(assets, sites, strict=True)
    )


def _names(tables: Any) -> tuple[str, ...]:
    return tuple(sorted({name for table in tables for name in table}))


def _matrix(tables: list[Any], names: tuple[str, ...]) -> FloatArray:
    rows = [[table.get(name, np.nan) for name in names] for table in tables]
    return np.array(rows, dtype=float).reshape(len(tables), len(names))
