"""`magsafe materials` and `magsafe bands`: the tables a design may name rows of."""


def materials() -> None:
    """List the conductor materials, with conductivity and source."""
    from magsafe.reports.tables import show_materials  # noqa: PLC0415  (keeps --help quick)

    show_materials()


def bands() -> None:
    """List the amateur bands by ITU region, with source."""
    from magsafe.reports.tables import show_bands  # noqa: PLC0415  (keeps --help quick)

    show_bands()
