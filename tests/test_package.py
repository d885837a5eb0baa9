"""The public face: everything promised is there, and costs nothing until it is used."""

from __future__ import annotations

import subprocess
import sys
from importlib.metadata import version

import pytest

import settlelab

HEAVY = ("cv2", "pandas", "lmfit", "matplotlib", "scipy", "pint", "pydantic", "numpy")


@pytest.mark.parametrize("name", settlelab.__all__)
def test_public_names_load(name: str) -> None:
    assert getattr(settlelab, name) is not None


def test_unknown_name_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="settle_down"):
        _ = settlelab.settle_down


def test_version_is_that_of_the_distribution() -> None:
    assert settlelab.__version__ == version("settlelab")


@pytest.mark.parametrize("code", ["import settlelab", "import settlelab.cli"])
def test_import_is_light(code: str) -> None:
    """A fresh process: this one has long loaded everything."""
    listing = f"import sys; {code}; print(' '.join(sys.modules))"
    loaded = subprocess.run([sys.executable, "-c", listing], capture_output=True, text=True, check=True).stdout.split()
    assert not set(HEAVY) & set(loaded)


def test_help_loads_no_heavy_library() -> None:
    code = (
        "import sys\nfrom settlelab.cli import main\n"
        "try:\n    main(['--help'])\nexcept SystemExit:\n    print(' '.join(sys.modules))"
    )
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    assert not set(HEAVY) & set(loaded)
