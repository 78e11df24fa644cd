"""`magsafe draft`: asks its way to a new design file."""

import sys
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from magsafe.cli.conversation import Conversation
    from magsafe.design.writing import Entry

Output = Annotated[
    str | None,
    typer.Option("-o", "--output", metavar="FILE", help="The design file; its name is asked for where none is given."),
]
Replace = Annotated[bool, typer.Option("--replace", help="Let the file replace one that exists.")]

LEFT = 2  # there is no design yet, so whatever would use it must not go on


def draft(output: Output = None, replace: Replace = False) -> None:
    """Ask for a loop one thing at a time, tell figures on the way, and write a commented design file.

    It can be left at any question and taken up again with the same -o. Leaves with 0 (the file is written) or 2 (it is
    not: left before the end, or no terminal to ask at).
    """
    _require_terminal()
    if replace and output is None:
        from magsafe.errors import CommandError  # noqa: PLC0415  (keeps --help quick)

        raise CommandError("--replace", "no -o beside it", "a file to replace", "add -o FILE, or leave it out")
    target = None if output is None else _target(output, replace=replace)
    from magsafe.cli.conversation import Conversation, Left  # noqa: PLC0415
    from magsafe.reports.draft import Teller  # noqa: PLC0415
    from magsafe.reports.terminal import console_on_output  # noqa: PLC0415

    told = Conversation(_listen, Teller(console_on_output()))
    try:
        told.teller.welcome()
        target = _begin(told, target, replace=replace)
        entries = told.run()
    except (Left, KeyboardInterrupt, EOFError):
        _leave(told, target, replace=replace)
        raise typer.Exit(LEFT) from None
    _finish(told, target, entries, replace=replace)


def _require_terminal() -> None:
    if sys.stdin is not None and sys.stdin.isatty() and sys.stdout is not None and sys.stdout.isatty():
        return
    from magsafe.errors import CommandError  # noqa: PLC0415

    raise CommandError(
        "draft",
        "no terminal on standard input and output",
        "a terminal: it asks questions and waits for answers",
        "run it in a terminal; or copy a sample design, such as sample_designs/quay_rail.toml, and change it; "
        "magsafe schema design prints every key",
    )


def _listen() -> str:
    import contextlib  # noqa: PLC0415

    with contextlib.suppress(ImportError):
        import readline  # noqa: F401, PLC0415  (input() edits lines with it)
    sys.stdout.flush()
    return input("> ")


def _target(name: str, *, replace: bool) -> Path:
    """Return the file to be written; raise CommandError where it cannot be."""
    from magsafe.cli.saving import require_writable  # noqa: PLC0415
    from magsafe.cli.unfinished import beside, kept  # noqa: PLC0415
    from magsafe.design.quantities import show  # noqa: PLC0415
    from magsafe.errors import CommandError  # noqa: PLC0415

    if not name.strip() or name == "-" or not name.isprintable():
        raise CommandError("-o", show(name), "the name of a file", "name one, such as loop.toml")
    path = Path(name)
    require_writable("-o", path, replace=replace)
    require_writable("-o", beside(path), replace=True)
    kept(path)  # refuses something else under that name
    return path


def _begin(told: "Conversation", target: Path | None, *, replace: bool) -> Path:
    """Settle the file's name, and take up what waits for it."""
    from magsafe.cli.unfinished import keep, kept  # noqa: PLC0415

    if target is None:
        target = Path(told.file(lambda name: _target(name, replace=replace)))
    told.name = target.name
    told.keep = lambda state: keep(target, state)
    waiting = kept(target)
    if waiting is not None:
        count = told.take_up(waiting)
        told.teller.lines(
            "", f"Going on where it was left: {count} answers are there. Go through them with back, from the last on."
        )
    elif told.state.answers:
        keep(target, told.state)
    return target


def _finish(told: "Conversation", target: Path, entries: "tuple[Entry, ...]", *, replace: bool) -> None:
    """Write the file, forget what waited for it, and tell the verdict."""
    import magsafe  # noqa: PLC0415
    from magsafe.cli.conversation import head  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.cli.unfinished import beside  # noqa: PLC0415
    from magsafe.design.writing import design_text  # noqa: PLC0415

    text = design_text(entries, head(target)).encode("utf-8")
    design = magsafe.parse_design(text, target.name)
    save("-o", target, text, replace=replace)
    beside(target).unlink(missing_ok=True)
    told.teller.lines("", f"The design is in {target}. Checking it ...")
    try:
        told.teller.verdict(magsafe.check(design))
    except KeyboardInterrupt:
        told.teller.lines("", "The check was broken off; nothing is proven. The design is written.")
    told.teller.lines("")
    told.teller.command("Every figure and finding:", "magsafe", "check", str(target))


def _leave(told: "Conversation", target: Path | None, *, replace: bool) -> None:
    from magsafe.cli.unfinished import beside  # noqa: PLC0415

    if target is None or not beside(target).exists():
        told.teller.lines("", "Left. No file was named or nothing answered yet, so nothing is kept.")
        return
    told.teller.lines("", f"Left. No design is written yet. Your answers are in {beside(target)}.")
    told.teller.command("Go on with:", "magsafe", "draft", "-o", str(target), *(["--replace"] if replace else []))
