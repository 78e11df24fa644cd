"""`magsafe schema`: the JSON schemas of what goes in and what comes out."""

import json
from enum import StrEnum
from typing import Annotated

import typer

from magsafe.cli.common import write


class Which(StrEnum):
    """The two forms that have a schema."""

    design = "design"
    sheet = "sheet"


def schema(which: Annotated[Which, typer.Argument(help="design or sheet")]) -> None:
    """Print the JSON schema of the design file or of the sheet."""
    from magsafe.checks.sheet import Sheet  # noqa: PLC0415
    from magsafe.design.model import DesignFile  # noqa: PLC0415

    model = DesignFile if which is Which.design else Sheet
    made = model.model_json_schema(by_alias=True)
    made = {"$schema": "https://json-schema.org/draft/2020-12/schema", **made}
    write(json.dumps(made, indent=2, ensure_ascii=False))
