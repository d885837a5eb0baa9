"""The simulator shares nothing with the analysis but units, physics and errors."""

from __future__ import annotations

import subprocess
import sys


def test_simulator_loads_no_room_of_the_analysis() -> None:
    code = "import sys, settlelab.simulate; print(*[name for name in sys.modules if name.startswith('settlelab.')])"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    rooms = {name.split(".")[1] for name in loaded}
    assert "simulate" in rooms
    assert rooms <= {"simulate", "units", "physics", "errors"}
