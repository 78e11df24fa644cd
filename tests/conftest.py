"""Fixtures: makers of designs that are easy to vary."""

import pytest
from designs import MakeDesign, MakeTree, plain_design, plain_tree


@pytest.fixture
def design() -> MakeDesign:
    """Give the maker of plain designs."""
    return plain_design


@pytest.fixture
def tree() -> MakeTree:
    """Give the maker of plain trees."""
    return plain_tree
