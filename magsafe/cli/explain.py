"""`magsafe explain`: what a figure or a finding rests on, and the numbers that went in."""

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import load, reader_may_leave

if TYPE_CHECKING:
    from magsafe.design.model import Design
    from magsafe.errors import CommandError
    from magsafe.reports.explanations import FindingText

Name = Annotated[
    str | None,
    typer.Argument(metavar="FIGURE", help="A figure or a finding of the sheet, such as capacitor_peak_voltage."),
]
OfDesign = Annotated[
    str | None,
    typer.Argument(metavar="DESIGN", help="The design file (TOML), or - for standard input: the numbers too."),
]


def explain(figure: Name = None, design: OfDesign = None) -> None:
    """Tell how a figure is found: formula, source, valid range, stated error, and what makes its dangerous end.

    With a design, the numbers that went in for each transmission, so that somebody else can work it out again. With a
    design alone, all of its figures briefly; without anything, every name that can be explained. Leaves with 0, or
    with 2 where a name is not known or the design cannot be used: nothing is judged here.
    """
    if figure is None:
        from magsafe.reports.explain import show_list  # noqa: PLC0415  (keeps --help quick)

        with reader_may_leave():
            show_list()
        return
    from magsafe.reports.explanations import figure_texts, finding_text  # noqa: PLC0415

    told, asked = figure_texts().get(figure), finding_text(figure)
    if told is not None:
        from magsafe.analysis.operating_point import operating_points  # noqa: PLC0415
        from magsafe.reports.explain import show_figure  # noqa: PLC0415

        read = None if design is None else load(design)
        points = () if read is None else operating_points(read)
        with reader_may_leave():
            show_figure(told, read, points)
    elif asked is not None:
        _explain_finding(asked, figure, None if design is None else load(design))
    elif design is None and (figure == "-" or _is_file(figure)):
        from magsafe.analysis.operating_point import operating_points  # noqa: PLC0415
        from magsafe.reports.explain import show_design  # noqa: PLC0415

        read = load(figure)
        points = operating_points(read)
        with reader_may_leave():
            show_design(read, points)
    else:
        raise _unknown(figure, design)


def _explain_finding(text: "FindingText", name: str, design: "Design | None") -> None:
    from magsafe.reports.explain import show_finding  # noqa: PLC0415  (keeps --help quick)

    if design is None:
        with reader_may_leave():
            show_finding(text, None)
        return
    import magsafe  # noqa: PLC0415
    from magsafe.design.quantities import show  # noqa: PLC0415
    from magsafe.errors import CommandError  # noqa: PLC0415

    sheet = magsafe.check(design)
    every = [("all transmissions", finding) for finding in sheet.findings]
    every += [(point.name, finding) for point in sheet.operating_points for finding in point.findings]
    family = [(title, finding) for title, finding in every if text.holds(finding.id)]
    found = family if name == text.id else [(title, finding) for title, finding in family if finding.id == name]
    if not found:
        known = ", ".join(dict.fromkeys(finding.id for _, finding in family))
        raise CommandError(
            "FIGURE",
            f"{show(name)}, which {design.origin.name} does not give",
            known or "a finding that this design gives",
            "choose one of them" if known else "leave the design out to read what it asks",
        )
    with reader_may_leave():
        show_finding(text, sheet, found)


def _is_file(name: str) -> bool:
    try:
        return Path(name).is_file()
    except (OSError, ValueError):
        return False


def _unknown(name: str, design: str | None) -> "CommandError":
    """Return the error of a name that is not known, with those that may have been meant."""
    from magsafe.design.quantities import show  # noqa: PLC0415  (keeps --help quick)
    from magsafe.errors import CommandError  # noqa: PLC0415
    from magsafe.reports.explanations import figure_texts, finding_text, near  # noqa: PLC0415

    swapped = design is not None and (design in figure_texts() or finding_text(design) is not None)
    if swapped and (name == "-" or _is_file(name)):
        return CommandError(
            "FIGURE", show(name), "the figure first, then the design", f"write magsafe explain {design} {name}"
        )
    if name.endswith(".toml"):
        return CommandError("FIGURE", f"{show(name)}, no file", "a figure, or a design file", "check the name")
    close = near(name)
    do = "magsafe explain lists all of them"
    if close:
        do = f"did you mean {', '.join(close[:-1])} or {close[-1]}?" if close[1:] else f"did you mean {close[0]}?"
    return CommandError("FIGURE", show(name), "a figure or a finding by its name", do)
