"""Before filming: what a study will show, how well, and what to change first.

In: a study whose videos need not exist yet. Out: expected velocities and uncertainties of every particle in its fluid,
and verdicts on column, camera, release and number of drops. The uncertainty is propagated by the same code as that of a
measurement.
"""

from __future__ import annotations

from settlelab.plan.model import Aims, Plan, Planned, SetupPlan, Verdict
from settlelab.plan.page import plan_text, write_plan
from settlelab.plan.planning import plan_study

__all__ = ["Aims", "Plan", "Planned", "SetupPlan", "Verdict", "plan_study", "plan_text", "write_plan"]
