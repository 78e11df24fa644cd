"""`magsafe rules`, `magsafe materials` and `magsafe bands`: the tables a design may name rows of."""

from typing import Annotated

import typer

from magsafe.cli.common import reader_may_leave


def rules(
    rule: Annotated[str | None, typer.Argument(metavar="[RULE]", help="Show one rule with all its limits.")] = None,
) -> None:
    """List the exposure rules with their editions, or one rule with every limit, its source and who has read it."""
    from magsafe.reports.rules import show_rule, show_rules  # noqa: PLC0415  (keeps --help quick)

    if rule is None:
        with reader_may_leave():
            show_rules()
    else:
        with reader_may_leave():
            show_rule(rule)


def materials() -> None:
    """List the conductor materials and the grounds, with their constants and sources."""
    from magsafe.reports.tables import show_materials  # noqa: PLC0415  (keeps --help quick)

    with reader_may_leave():
        show_materials()


def bands() -> None:
    """List the amateur bands by ITU region, with source."""
    from magsafe.reports.tables import show_bands  # noqa: PLC0415  (keeps --help quick)

    with reader_may_leave():
        show_bands()
