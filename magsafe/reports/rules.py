"""The exposure rules on a terminal: which there are, and every limit of one with its source."""

from collections.abc import Iterator, Sequence

from rich.console import Console
from rich.table import Table
from rich.text import Text

from magsafe.errors import CommandError
from magsafe.reports.terminal import console_on_output, put
from magsafe.rules import (
    BodyMean,
    Current,
    Exemption,
    Limit,
    Rule,
    Segment,
    Summation,
    UnknownRule,
    Who,
    load_rule,
    rule_names,
)
from magsafe.rules.limit import WHO


def show_rules(console: Console | None = None) -> None:
    """Print the rules that the project knows, and for whom each has limits."""
    console = console or console_on_output()
    table = _table("rule", "limits for", "standard", "edition")
    for name in rule_names():
        rule = load_rule(name)
        table.add_row(name, ", ".join(who for who in WHO if rule.limits(who)), rule.standard, _edition(rule))
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
    put(console, Text(rule.title, style="bold"), f"{rule.standard}\n{_edition(rule)}\n")
    put(console, f"How E and H are judged: {rule.how_judged}\n")
    put(console, f"Several transmissions: {_added(rule.summation)}", f"{_rests(rule.summation)}\n")
    put(console, f"Mean over the body: {_meant(rule.body)}", f"{_rests(rule.body)}\n")
    for who in WHO:
        _show_tier(console, rule, who)
    _show_exemptions(console, rule)
    put(console, f"{rule.notes}\nFile {rule.file}, sha256 {rule.sha256}")


def _added(summation: Summation) -> str:
    said = {
        "apart": "on a basis that is averaged, the squares of E over their limits come to no more than 1, and so do "
        "those of H.",
        "larger": "on a basis that is averaged, the larger of the squares of E and of H over their limits, added for "
        "all, comes to no more than 1.",
        "together": "on a basis that is averaged, the squares of E and of H over their limits, added for all, come to "
        "no more than 1 together.",
    }[summation.fields]
    if summation.together_up_to is None:
        return said
    return f"{said} So up to {summation.together_up_to / 1e6:g} MHz; above, the larger of the two counts."


def _meant(body: BodyMean) -> str:
    if not body.mean:
        return "does not count; the largest field over the body does."
    near = "" if body.nearest is None else f", no nearer to the source than {body.nearest:g} m"
    local = f" Left unjudged then: {body.local}." if body.local else ""
    return f"of the square, where it is asked for, on {', '.join(body.bases)}{near}.{local}"


def _rests(part: Summation | BodyMean | Exemption) -> str:
    return f"Source: {part.source} ({part.provenance}): {part.provenance_detail}."


def _show_exemptions(console: Console, rule: Rule) -> None:
    for each in rule.exemptions:
        counted = "the mean" if each.averaged else "the crest of the envelope"
        title = f"Exempt from evaluation, not from the limits: {each.jurisdiction}, {each.name}"
        put(console, Text(title, style="bold"))
        if each.threshold is not None:
            edge = "at or below" if each.included else "below"
            put(console, f"{each.kind} {edge} {each.threshold:g} W; {counted} counts.")
        else:
            put(console, f"{each.kind}, R in m; {counted} counts. It holds from R = {each.valid_beyond} on.")
            table = _table("MHz", "threshold, f in MHz")
            for segment in each.segments:
                table.add_row(_band(segment), _power_law("R^2 W", segment.coefficient, segment.exponent))
            put(console, table)
        put(console, _rests(each), *([each.notes] if each.notes else []), "")


def _edition(rule: Rule) -> str:
    return rule.edition if rule.holds_until is None else f"{rule.edition}, superseded {rule.holds_until}"


def _show_tier(console: Console, rule: Rule, who: Who) -> None:
    rows = [row for row in rule.rows if row.who == who]
    tier = rule.tier(who)
    own = f": {tier.own_words}. {tier.meaning}" if tier is not None else ""
    put(console, Text(f"{who}{own}", style="bold"))
    if rule.why_without(who):
        put(console, f"No limits: {rule.why_without(who)}.\n")
    if not rows:
        return
    table = _table("field", "MHz", "limit, f in MHz", "averaged", "rests on")
    for row in rows:
        _add(table, f"{row.field}, {row.basis}{'' if row.judged else ' (not judged)'}", row, row.unit)
    put(console, table)
    currents = [each for each in rule.currents if each.who == who]
    if currents:
        table = _table("current, RMS (not judged)", "MHz", "level", "averaged", "rests on")
        for current in currents:
            _add(table, current.kind, current, "mA")
        put(console, "", table)
    shown: tuple[Limit | Current, ...] = (*rows, *currents)
    put(console, "", *dict.fromkeys(text for each in shown for text in _sources(each)))
    put(console, *_remarks(shown), "")


def _sources(row: Limit | Current) -> Iterator[str]:
    """Yield what a row was read in, and for segments that rest on something else what that is."""
    part = f" What was read: {row.verified_part}." if row.verified_part else ""
    yield f"Source: {row.source}: {row.provenance_detail}.{part}"
    for each in row.segments:
        if each.provenance_detail != row.provenance_detail:
            yield f"Source: {row.source}, {_band(each)} MHz: {each.provenance_detail}."


def _remarks(shown: Sequence[Limit | Current]) -> Iterator[str]:
    """Yield the notes of some rows and why they are not judged, each text once with the rows that it is about."""
    about: dict[tuple[str, str], list[str]] = {}
    for row in shown:
        name = f"{row.field}, {row.basis}" if isinstance(row, Limit) else f"current, {row.kind}"
        if row.notes:
            about.setdefault(("Note on", row.notes), []).append(name)
        if isinstance(row, Limit) and not row.judged:
            about.setdefault(("Not judged,", f"{row.why_not_judged}."), []).append(name)
    for (what, text), names in about.items():
        yield f"{what} {'; '.join(names)}: {text}"


def _add(table: Table, name: str, row: Limit | Current, unit: str) -> None:
    """Add the segments of a row to a table, its name before the first."""
    for index, segment in enumerate(row.segments):
        table.add_row(
            name if index == 0 else "",
            _band(segment),
            _power_law(unit, segment.coefficient, segment.exponent),
            f"{row.averaging_time / 60:g} min" if row.averaged else "no",
            segment.provenance,
        )


def _band(segment: Segment) -> str:
    return f"{segment.lowest_frequency / 1e6:g} to {segment.highest_frequency / 1e6:g}"


def _power_law(unit: str, coefficient: float, exponent: float) -> str:
    if exponent == 0.0:
        return f"{coefficient:g} {unit}"
    slope = f"/ f^{-exponent:g}" if exponent < 0.0 else f"* f^{exponent:g}"
    return f"{coefficient:g} {slope if abs(exponent) != 1.0 else slope[:-2]} {unit}"


def _table(*columns: str) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 1), show_edge=False)
    for column in columns:
        table.add_column(column, overflow="fold")
    return table
