"""Evidence from what the descriptor states of the machine itself."""

from rca.base.source import Source
from rca.case.model import Case
from rca.case.vocabulary import FluidClass
from rca.evidence.item import Basis, EvidenceItem, Group, Node, NotAssessed


def from_statements(case: Case) -> tuple[EvidenceItem | NotAssessed, ...]:
    """Items that rest on the descriptor alone."""
    return (_fluid(case),)


def _fluid(case: Case) -> EvidenceItem | NotAssessed:
    """Whether the fluid is of the class of which streaming-current erosion is reported."""
    fluid = case.fluid.fluid_class
    if fluid is None:
        return NotAssessed(
            key="fluid.etches", node=Node.FLUID_ETCHES, missing="the class of the fluid"
        )
    digest = next((f.sha256 for f in case.files if f.file == "case.toml"), "")
    known = fluid is FluidClass.PHOSPHATE_ESTER
    return EvidenceItem(
        key="fluid.etches",
        node=Node.FLUID_ETCHES,
        likelihood={"no": 0.02, "yes": 0.98} if known else {"no": 0.98, "yes": 0.02},
        statement=f"The fluid is stated as {fluid.value}.",
        sources=(Source(file="case.toml", locator="fluid.class", sha256=digest),),
        group=Group.OIL,
        common_cause="fluid as stated",
        basis=Basis.STATED,
        absent=not known,
    )
