"""The exposure rules on a terminal: which there are, and every limit of one with its source."""

from rich.console import Console
from rich.table import Table
from rich.text import Text

from magsafe.errors import CommandError
from magsafe.reports.terminal import console_on_output, put
from magsafe.rules.limit import WHO, Limit, Rule, UnknownRule, load_rule, rule_names


def show_rules(console: Console | None = None) -> None:
    """Print the rules in force that the project knows."""
    console = console or console_on_output()
    table = _table("rule", "standard", "edition")
    for name in rule_names():
        rule = load_rule(name)
        table.add_row(name, rule.standard, rule.edition)
    put(console, table, "\nmagsafe rules RULE shows every limit of one. Local law decides which of them holds.")


def show_rule(name: str, console: Console | None = None) -> None:
    """Print one rule: its limits by tier, what each averages over, its source and what that rests on.

    Raises
    ------
    CommandError : no rule of that name
    """
    try:
        rule = load_rule(name)
    except UnknownRule as error:
        near = f"did you mean {error.nearest[0]}?" if error.nearest else "see magsafe rules"
        raise CommandError("rules", name, f"one of {', '.join(rule_names())}", near) from None
    console = console or console_on_output()
    put(console, Text(rule.title, style="bold"), f"{rule.standard}\n{rule.edition}\n")
    put(console, f"How E and H are judged: {rule.how_judged}\n")
    for who in WHO:
        _show_tier(console, rule, who)
    put(console, f"{rule.notes}\nFile {rule.file}, sha256 {rule.sha256}")


def _show_tier(console: Console, rule: Rule, who: str) -> None:
    rows = [row for row in rule.rows if row.who == who]
    tier = rule.tier(rows[0].who) if rows else None
    own = f": {tier.own_words}. {tier.meaning}" if tier is not None else ""
    put(console, Text(f"{who}{own}", style="bold"))
    table = _table("field", "MHz", "limit, f in MHz", "averaged", "rests on")
    for row in rows:
        for index, segment in enumerate(row.segments):
            first = f"{row.field}, {row.basis}{'' if row.judged else ' (not judged)'}" if index == 0 else ""
            table.add_row(
                first,
                f"{segment.lowest_frequency / 1e6:g} to {segment.highest_frequency / 1e6:g}",
                _power_law(row, segment.coefficient, segment.exponent),
                f"{row.averaging_time / 60:g} min" if row.averaged else "no",
                segment.provenance,
            )
    put(console, table)
    sources = dict.fromkeys(f"{row.source}: {row.provenance_detail}" for row in rows)
    put(console, *(f"Source: {source}" for source in sources), "")
    for reason in dict.fromkeys(row.why_not_judged for row in rows if not row.judged):
        put(console, f"Not judged: {reason}\n")


def _power_law(row: Limit, coefficient: float, exponent: float) -> str:
    if exponent == 0.0:
        return f"{coefficient:g} {row.unit}"
    slope = f"/ f^{-exponent:g}" if exponent < 0.0 else f"* f^{exponent:g}"
    return f"{coefficient:g} {slope.removesuffix('^1')} {row.unit}"


def _table(*columns: str) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 1), show_edge=False)
    for column in columns:
        table.add_column(column, overflow="fold")
    return table
