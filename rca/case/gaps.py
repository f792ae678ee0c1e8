"""What a case does not hold, and what each gap costs the verdict."""

from rca.case.model import Case, Gap


def gaps_of(case: Case) -> tuple[Gap, ...]:
    """Everything missing that a check would have used, in a fixed order."""
    quantities = {channel.quantity for record in case.records for channel in record.channels}
    tests: tuple[tuple[bool, str, str, str], ...] = (
        (
            "inlet pressure" not in quantities,
            "record.inlet-pressure",
            "a record of the pressure at the pump inlet",
            "the suction side rests on computation alone; a clogged strainer can't be told from "
            "a clean one, and the verdict will often stay undetermined",
        ),
        (
            "discharge pressure" not in quantities,
            "record.discharge-pressure",
            "a record of the discharge pressure",
            "load, over-pressure and the rise time of the pressure are taken from the geometry",
        ),
        (
            "oil temperature" not in quantities,
            "record.oil-temperature",
            "a record of the oil temperature",
            "cold starts can't be seen and the viscosity is that of the stated temperature",
        ),
        (
            "shaft speed" not in quantities,
            "record.speed",
            "a record of the shaft speed",
            "running and standstill are told apart by pressure alone or not at all",
        ),
        (
            not case.oil_reports,
            "oil.reports",
            "laboratory reports of the oil",
            "soot, nitration, wear metals and air release are unknown, so micro-dieseling can't "
            "be told from a hot spot or from ageing",
        ),
        (
            not case.findings,
            "teardown.findings",
            "teardown findings",
            "no damage is on record, so no explanation has its marks",
        ),
        (
            not case.photos,
            "photos",
            "photographs",
            "findings rest on one observer's word",
        ),
        (
            not case.history,
            "history",
            "operating history and work orders",
            "oil changes, repairs and changes before the failure are unknown; oil trends can't "
            "be split at them",
        ),
        (
            not case.custody,
            "custody",
            "a custody record",
            "who held each exhibit, and when, can't be shown",
        ),
        (
            not case.actions,
            "actions",
            "corrective actions",
            "nothing is tracked until proved",
        ),
        (
            not case.suction_line,
            "suction-line",
            "the parts of the suction line",
            "no pressure budget and no comparison of predicted with measured inlet pressure",
        ),
        (
            case.pump.inlet_pressure_min is None,
            "pump.inlet-limit",
            "the maker's lowest inlet pressure",
            "a limit of common practice for the kind of pump stands in for it",
        ),
        (
            case.fluid.viscosity_40 is None or case.fluid.viscosity_100 is None,
            "fluid.viscosity",
            "the oil's viscosity at 40 and 100 degC",
            "the viscosity follows from the grade with wide bounds, or is unknown",
        ),
        (
            case.fluid.flash_point is None,
            "fluid.flash-point",
            "the oil's flash point",
            "the fuel available to a hot bubble is that of the class of fluid",
        ),
        (
            case.pump.transition_angle is None,
            "pump.transition-angle",
            "the pump's transition angle",
            "the rise time of the pressure is a wide range for the kind of pump",
        ),
    )
    return tuple(
        Gap(key=key, missing=missing, cost=cost) for absent, key, missing, cost in tests if absent
    )
