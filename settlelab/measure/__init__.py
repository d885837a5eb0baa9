"""From trajectories to terminal velocities, drag coefficients and their uncertainty.

In: a study and what the tracker followed. Out: the drop table, a budget of each uncertainty, control spheres against
what is expected of them, and sentences on what was assumed and what is doubtful.
"""

from __future__ import annotations

from settlelab.measure.causes import Cause, causes
from settlelab.measure.controls import ControlDrop, chain_verdict, e_n
from settlelab.measure.drops import measure_study
from settlelab.measure.falls import measure_falls, track_table
from settlelab.measure.fluids import FluidState, fluid_state
from settlelab.measure.lots import scatter_of
from settlelab.measure.model import Drop, Measured, Scatter, TrackPoint, Velocity
from settlelab.measure.velocity import terminal_velocity
from settlelab.measure.viscosity import falling_ball_viscosity

__all__ = [
    "Cause",
    "ControlDrop",
    "Drop",
    "FluidState",
    "Measured",
    "Scatter",
    "TrackPoint",
    "Velocity",
    "causes",
    "chain_verdict",
    "e_n",
    "falling_ball_viscosity",
    "fluid_state",
    "measure_falls",
    "measure_study",
    "scatter_of",
    "terminal_velocity",
    "track_table",
]
