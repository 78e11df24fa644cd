"""The commands that the README tells a reader to type: `python tests/readme_commands.py tests` prints one."""

import re
import sys
from pathlib import Path

README = Path(__file__).parents[1] / "README.md"


def command_under(name: str) -> str:
    """Return the shell command in the README's block that is marked `<!-- command: name -->`."""
    text = README.read_text(encoding="utf-8")
    found = re.search(rf"<!-- command: {re.escape(name)} -->\s*```sh\n(.*?)```", text, re.DOTALL)
    if found is None:
        raise SystemExit(f"README.md has no command marked {name!r}")
    return found[1].strip()


if __name__ == "__main__":
    sys.stdout.write(f"{command_under(sys.argv[1])}\n")
