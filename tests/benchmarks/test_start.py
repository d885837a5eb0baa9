"""How long a user waits for the first word."""

from __future__ import annotations

import subprocess
import sys
import time

from pytest_benchmark.fixture import BenchmarkFixture

LIMIT = 0.5  # s, for `settlelab --help`


def _seconds(*command: str) -> float:
    start = time.perf_counter()
    subprocess.run(command, check=True, capture_output=True)
    return time.perf_counter() - start


def test_help_answers_in_under_half_a_second(benchmark: BenchmarkFixture) -> None:
    command = (sys.executable, "-m", "settlelab", "--help")
    benchmark.pedantic(_seconds, args=command, rounds=7, warmup_rounds=1)
    quickest = min(_seconds(*command) for _ in range(5))
    bare = min(_seconds(sys.executable, "-c", "pass") for _ in range(5))
    benchmark.extra_info["times a bare interpreter"] = quickest / bare
    assert quickest < LIMIT
