"""Recordings to trajectories: a video file or a folder of pictures in, every fall followed to a fraction of a pixel.

Nothing is known here of fluids or particles; lengths stay in pixels beside the scale that turns them into metres.
"""

from __future__ import annotations

from settlelab.video.archive import load_tracked, save_tracked
from settlelab.video.follow import follow_falls
from settlelab.video.model import Clock, Track, TrackedRecording

__all__ = ["Clock", "Track", "TrackedRecording", "follow_falls", "load_tracked", "save_tracked"]
