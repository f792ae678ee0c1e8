"""Everything a notebook of an investigation imports.

    from rca.notebook import open_investigation, show

    inv = open_investigation(case_dir, store_dir, after=("records",))
    samples = inv.read_oil()
    check = check_oil(inv.case, samples)
    ...
    inv.keep("oil", check=check, evidence=..., section=..., figures=...)

Opened by hand in JupyterLab with an empty ``store_dir``, a notebook runs what it builds on first;
see ``rca.notebook.by_hand``.
"""

from rca.actions.review import ActionsCheck
from rca.damage.check import DamageCheck, check_damage
from rca.discharge.check import check_discharge
from rca.discharge.model import DischargeCheck
from rca.evidence.from_damage import from_damage
from rca.evidence.from_discharge import from_discharge
from rca.evidence.from_history import from_history
from rca.evidence.from_oil import from_oil
from rca.evidence.from_records import from_records
from rca.evidence.from_statements import from_statements
from rca.evidence.from_suction import from_suction
from rca.figures.actions import figures_actions
from rca.figures.damage import figures_damage
from rca.figures.discharge import figures_discharge
from rca.figures.oil import figures_oil
from rca.figures.panels_actions import panels_actions
from rca.figures.panels_case import panels_intake
from rca.figures.panels_damage import panels_damage
from rca.figures.panels_discharge import panels_discharge
from rca.figures.panels_oil import panels_oil
from rca.figures.panels_overview import panels_overview
from rca.figures.panels_records import panels_records
from rca.figures.panels_suction import panels_suction
from rca.figures.panels_verdict import panels_verdict
from rca.figures.records import figures_records
from rca.figures.suction import figures_suction
from rca.figures.verdict import figures_verdict
from rca.notebook.investigation import Investigation
from rca.notebook.opening import open_investigation, show
from rca.oil.check import OilCheck, check_oil
from rca.records.check import RecordCheck, check_records
from rca.suction.check import SuctionCheck, check_suction, inlet_limit
from rca.verdict.knowledge import shipped_knowledge
from rca.verdict.model import VerdictCheck
from rca.verdict.weigh import weigh

__all__ = [
    "ActionsCheck",
    "DamageCheck",
    "DischargeCheck",
    "Investigation",
    "OilCheck",
    "RecordCheck",
    "SuctionCheck",
    "VerdictCheck",
    "check_damage",
    "check_discharge",
    "check_oil",
    "check_records",
    "check_suction",
    "figures_actions",
    "figures_damage",
    "figures_discharge",
    "figures_oil",
    "figures_records",
    "figures_suction",
    "figures_verdict",
    "from_damage",
    "from_discharge",
    "from_history",
    "from_oil",
    "from_records",
    "from_statements",
    "from_suction",
    "inlet_limit",
    "open_investigation",
    "panels_actions",
    "panels_damage",
    "panels_discharge",
    "panels_intake",
    "panels_oil",
    "panels_overview",
    "panels_records",
    "panels_suction",
    "panels_verdict",
    "shipped_knowledge",
    "show",
    "weigh",
]
