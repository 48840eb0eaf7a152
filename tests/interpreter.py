"""Runs Python code or the program in a process of its own."""

import os
import subprocess
import sys
from collections.abc import Mapping, Sequence


def run_python(
    arguments: Sequence[str], *, environment: Mapping[str, str | None] | None = None, folder: str | None = None
) -> subprocess.CompletedProcess[str]:
    """Run this interpreter; of the environment given, None takes a variable away."""
    changed = {**os.environ, **(environment or {})}
    return subprocess.run(  # noqa: S603  our own interpreter, and arguments that stand in the tests
        [sys.executable, *arguments],
        capture_output=True,
        encoding="utf-8",
        check=False,
        env={name: value for name, value in changed.items() if value is not None},
        cwd=folder,
        stdin=subprocess.DEVNULL,
    )
