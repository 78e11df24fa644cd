"""Running the command line as a person or a script does."""

import os
import subprocess
import sys
from collections.abc import Mapping

COMMANDS = (
    "check",
    "capacitor",
    "keepout",
    "logsheet",
    "recheck",
    "measured",
    "draft",
    "explain",
    "rules",
    "materials",
    "bands",
    "schema",
)


def run(*arguments: str, given: bytes = b"", env: Mapping[str, str] | None = None) -> subprocess.CompletedProcess[str]:
    base = {k: v for k, v in os.environ.items() if k not in ("COLUMNS", "NO_COLOR", "FORCE_COLOR")}
    return subprocess.run(
        [sys.executable, "-m", "magsafe", *arguments],
        input=given.decode(),
        capture_output=True,
        text=True,
        encoding="utf-8",
        env={**base, "PYTHONIOENCODING": "utf-8", **(env or {})},
        check=False,
    )
