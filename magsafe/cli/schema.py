"""`magsafe schema`: the JSON schemas of what goes in and what comes out."""

import json
from enum import StrEnum
from typing import Annotated, Any

import typer

from magsafe.cli.common import write


class Which(StrEnum):
    """The two forms that have a schema."""

    design = "design"
    sheet = "sheet"


def schema(which: Annotated[Which, typer.Argument(help="design or sheet")]) -> None:
    """Print the JSON schema of the design file or of the sheet."""
    write(schema_text(which))


def schema_text(which: Which) -> str:
    """Return a JSON schema as it is printed, and as it lies beside the sample designs for editors."""
    from magsafe.checks.sheet import Sheet  # noqa: PLC0415  (keeps --help quick)
    from magsafe.design.model import DesignFile  # noqa: PLC0415

    if which is Which.design:
        made = as_written(DesignFile.model_json_schema(by_alias=True))
    else:
        made = Sheet.model_json_schema(by_alias=True)
    made = {"$schema": "https://json-schema.org/draft/2020-12/schema", **made}
    return json.dumps(made, indent=2, ensure_ascii=False) + "\n"


def as_written(made: Any) -> Any:
    """Return a schema that offers only what a TOML file may hold.

    There is no null in TOML: a key that is not given is left out. Nor is a default in SI units what one would write.
    """
    if isinstance(made, list):
        return [as_written(each) for each in made]
    if not isinstance(made, dict):
        return made
    found = {key: as_written(value) for key, value in made.items()}
    forms = found.get("anyOf")
    if isinstance(forms, list) and {"type": "null"} in forms:
        kept = [form for form in forms if form != {"type": "null"}]
        del found["anyOf"]
        found = {**(kept[0] if len(kept) == 1 else {"anyOf": kept}), **found}
    if "default" in found:
        default = found["default"]
        of_si = found.get("type") == "string" and not isinstance(default, str)
        if default is None or isinstance(default, dict) or of_si:
            del found["default"]
    return found
