"""Keeps what the program remembers of a user, which profile was open last, away from the person who runs the tests."""

import os
import tempfile
from collections.abc import Iterator

import pytest


@pytest.fixture(scope="session", autouse=True)
def configuration_home() -> Iterator[None]:
    with tempfile.TemporaryDirectory(prefix="airfield-board-tests-") as folder, pytest.MonkeyPatch.context() as patch:
        patch.setenv("XDG_CONFIG_HOME", os.fspath(folder))
        yield
