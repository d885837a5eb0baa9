"""The registry: one entry is the whole truth about a method."""

from __future__ import annotations

import numpy as np
import pytest

from settlelab.errors import SettlelabError
from settlelab.physics.drag.registry import Method
from settlelab.physics.registry import Registry, find


def board() -> Registry[Method]:
    registry: Registry[Method] = Registry(Method)

    @registry.published(
        "doe-2001", source="Doe & Roe (2001), J. Nowhere 1, 2", valid={"reynolds": (0, 9)}, diameter="sphere"
    )
    def law(reynolds: np.ndarray, sphericity: np.ndarray) -> np.ndarray:
        """Drag of nothing.

        Further lines are left out.
        """
        return 24 / reynolds + sphericity

    return registry


def test_everything_is_read_from_the_entry() -> None:
    method = board()["doe-2001"]
    assert method.needs == ("sphericity",)
    assert method.purpose == "Drag of nothing."
    assert method.citation == "Doe & Roe (2001)"
    assert method.drag_coefficient(12, sphericity=[1.0, 2.0], flatness=0.5).tolist() == [3.0, 4.0]
    assert method.within(reynolds=[[1.0], [10.0]], sphericity=[0.5, 0.6]).tolist() == [[True, True], [False, False]]


def test_a_name_stands_once() -> None:
    registry = board()
    with pytest.raises(ValueError, match="doe-2001 is entered twice"):
        registry.published("doe-2001", source="", valid={}, diameter="sphere")(np.sqrt)


def test_find() -> None:
    registry = board()
    assert find("doe-2001", {}, registry) is registry["doe-2001"]
    with pytest.raises(
        SettlelabError, match=r'"doe-2010" is not a published method on board \(did you mean "doe-2001"\?\)'
    ):
        find("doe-2010", registry)
    with pytest.raises(SettlelabError, match='"other" is not a published method on board; on board are doe-2001'):
        find("other", registry)
