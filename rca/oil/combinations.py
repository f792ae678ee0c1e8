"""Pictures that results make together: what fits, what does not, what nobody tested.

One property alone decides nothing; these combinations part the ways an oil goes bad. Sources of
the pictures: W. D. Phillips, J. Synthetic Lubrication 23 (2006) 39 (compression of air bubbles
darkens oil fast and leaves fine carbon); ASTM E2412 and D7414 to D7624 (infrared bands); ASTM
D7843 (patch colours); the rest common practice, no source.
"""

from collections.abc import Callable
from dataclasses import dataclass

from rca.oil.darkening import DARK, FAST_DAYS, Darkening
from rca.oil.judge import Judged

State = bool | None  # seen, looked for and not shown, not tested


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """One way an oil goes bad against the results at hand."""

    name: str
    fits: tuple[str, ...]
    does_not_fit: tuple[str, ...]
    not_tested: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class _Facts:
    judged: dict[str, Judged]
    dark: Darkening | None

    def moved(self, name: str, direction: int, need: float = 1.0) -> State:
        """Whether a property rose (+1) or fell (-1) beyond its noise floor."""
        one = self.judged.get(name)
        if one is None or one.stands_out is None:
            return None
        return direction * one.stands_out >= need

    def flat(self, *names: str) -> State:
        """Whether all of these were tested and none moved."""
        known = [self.judged[n].stands_out for n in names if n in self.judged]
        if len(known) < len(names) or any(k is None for k in known):
            return None
        return all(
            abs(k or 0.0) < (3.0 if n == "viscosity_40" else 1.0)
            for n, k in zip(names, known, strict=True)
        )

    def darkened(self, *, fast: bool) -> State:
        """Whether the oil darkened, most of it inside FAST_DAYS or over longer."""
        if self.dark is None:
            return None
        if self.dark.change < DARK:
            return False
        if self.dark.step_days is None:
            return None
        return (self.dark.step_days <= FAST_DAYS) is fast

    def below(self, name: str, limit: float) -> State:
        """Whether a property lies below a number."""
        one = self.judged.get(name)
        return None if one is None else one.value < limit

    def above(self, name: str, limit: float) -> State:
        """Whether a property lies above a number."""
        one = self.judged.get(name)
        return None if one is None else one.op != "<" and one.value > limit


def _both(one: State, other: State) -> State:
    if one is False or other is False:
        return False
    return None if one is None or other is None else True


def _any(*states: State) -> State:
    """Whether one of several tests for the same thing shows it."""
    if any(s is True for s in states):
        return True
    return None if all(s is None for s in states) else False


def _neither_dark_nor_soot(facts: _Facts) -> State:
    dark = None if facts.dark is None else facts.dark.change >= DARK
    found = _any(dark, facts.moved("soot", 1))
    return None if found is None else not found


_Test = Callable[[_Facts], State]
_PICTURES: tuple[tuple[str, tuple[tuple[str, _Test], ...]], ...] = (
    (
        "combustion of air bubbles",
        (
            ("most of the darkening within 200 days", lambda f: f.darkened(fast=True)),
            ("soot above new oil", lambda f: f.moved("soot", 1)),
            ("nitration above new oil", lambda f: f.moved("nitration", 1)),
            ("viscosity and acid number flat", lambda f: f.flat("viscosity_40", "acid_number")),
        ),
    ),
    (
        "spark discharge",
        (
            ("conductivity under 100 pS/m", lambda f: f.below("conductivity", 100.0)),
            ("antioxidant lost", lambda f: f.moved("antioxidant_remaining", -1, 2.0)),
            ("acid number flat", lambda f: f.flat("acid_number")),
            ("patch colour up", lambda f: f.moved("patch_colour", 1, 2.0)),
        ),
    ),
    (
        "bulk oxidation",
        (
            ("acid number up", lambda f: f.moved("acid_number", 1)),
            ("infrared oxidation up", lambda f: f.moved("oxidation", 1)),
            ("viscosity up", lambda f: f.moved("viscosity_40", 1, 3.0)),
            ("antioxidant lost", lambda f: f.moved("antioxidant_remaining", -1, 2.0)),
            ("darkened gradually", lambda f: f.darkened(fast=False)),
        ),
    ),
    (
        "local hot spot",
        (
            ("flash point down", lambda f: f.moved("flash_point", -1)),
            ("viscosity down", lambda f: f.moved("viscosity_40", -1, 3.0)),
            ("nitration flat", lambda f: f.flat("nitration")),
            ("acid number flat", lambda f: f.flat("acid_number")),
        ),
    ),
    (
        "dirt from outside",
        (
            ("silicon and aluminium up", lambda f: _both(f.moved("Si", 1), f.moved("Al", 1))),
            (
                "cleanliness worse than 18 at ≥6 µm",
                lambda f: _any(f.above("cleanliness_code", 18.0), f.above("particles_6", 2500.0)),
            ),
            ("iron up", lambda f: f.moved("Fe", 1)),
        ),
    ),
    (
        "water",
        (
            ("water over 500 mg/kg", lambda f: f.above("water", 500.0)),
            (
                "sodium, magnesium or calcium up",
                lambda f: _any(*(f.moved(n, 1) for n in ("Na", "Mg", "Ca"))),
            ),
            (
                "iron up, ferrous index flat (rust)",
                lambda f: _both(f.moved("Fe", 1), f.flat("ferrous_index")),
            ),
        ),
    ),
    (
        "wrong or mixed oil",
        (
            (
                "zinc, phosphorus or calcium off the new oil",
                lambda f: _any(*(_off(f, n) for n in ("Zn", "P", "Ca"))),
            ),
            (
                "viscosity off the new oil by 5 % or more",
                lambda f: _off_by(f, "viscosity_40", 5.0),
            ),
            (
                "air release or foam worse",
                lambda f: _any(f.moved("air_release", 1), f.moved("foam_tendency", 1)),
            ),
        ),
    ),
    (
        "wear in oil that is otherwise sound",
        (
            (
                "iron, copper or lead up",
                lambda f: _any(*(f.moved(n, 1) for n in ("Fe", "Cu", "Pb"))),
            ),
            ("ferrous index up (coarse iron)", lambda f: f.moved("ferrous_index", 1)),
            ("viscosity and acid number flat", lambda f: f.flat("viscosity_40", "acid_number")),
            ("silicon flat", lambda f: f.flat("Si")),
            ("not darkened, no soot", _neither_dark_nor_soot),
        ),
    ),
)


def _off(facts: _Facts, name: str) -> State:
    up, down = facts.moved(name, 1, 2.0), facts.moved(name, -1, 2.0)
    return None if up is None or down is None else up or down


def _off_by(facts: _Facts, name: str, per_cent: float) -> State:
    one = facts.judged.get(name)
    if one is None or one.change is None or not one.new:
        return None
    return abs(one.change / one.new) * 100.0 >= per_cent


def pictures_of(judged: dict[str, Judged], dark: Darkening | None) -> tuple[Picture, ...]:
    """Every picture with its signs sorted into fits, does not fit and not tested.

    A sign that is not shown says only that: fine soot, for one, often stays under what infrared
    can see.
    """
    facts = _Facts(judged, dark)
    found = []
    for name, tests in _PICTURES:
        states = [(words, test(facts)) for words, test in tests]
        found.append(
            Picture(
                name=name,
                fits=tuple(w for w, s in states if s is True),
                does_not_fit=tuple(w for w, s in states if s is False),
                not_tested=tuple(w for w, s in states if s is None),
            )
        )
    return tuple(found)
