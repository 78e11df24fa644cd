"""Fixtures: makers of designs that are easy to vary. One thread for the linear algebra, as the command has."""

import os

for _threads in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_threads, "1")

import pytest  # noqa: E402  (after what the linear algebra reads when it is loaded)
from designs import MakeDesign, MakeTree, plain_design, plain_tree  # noqa: E402


@pytest.fixture
def design() -> MakeDesign:
    """Give the maker of plain designs."""
    return plain_design


@pytest.fixture
def tree() -> MakeTree:
    """Give the maker of plain trees."""
    return plain_tree
