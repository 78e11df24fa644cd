"""Whether a rule lets the square of the field be averaged over the space that a body takes."""

from dataclasses import dataclass

from magsafe.rules.segment import PROVENANCES, Provenance
from magsafe.rules.table import LENGTH_UNITS, Entries


@dataclass(frozen=True, slots=True)
class BodyMean:
    """What a rule says of the mean over the body.

    With `mean` false the largest field over the body counts. With `mean` true the square may be averaged over the
    body on `bases`, no nearer to the source than `nearest` [m] (None: the rule names no distance); `local` says what
    the rule then asks besides and no row judges, empty where its rows judge that too.
    """

    mean: bool
    bases: tuple[str, ...]
    nearest: float | None
    local: str
    source: str
    provenance: Provenance
    provenance_detail: str


def read_body(entries: Entries) -> BodyMean:
    """What a rule says of the mean over the body; what is wrong with it is noted in `entries`."""
    body = BodyMean(
        mean=entries.flag("mean"),
        bases=entries.texts("bases"),
        nearest=entries.optional_quantity("nearest", LENGTH_UNITS),
        local=entries.text("local", default=""),
        source=entries.text("source"),
        provenance=entries.word("provenance", PROVENANCES),
        provenance_detail=entries.text("provenance_detail"),
    )
    entries.refuse_leftover()
    if body.mean and not body.bases:
        entries.note("bases is missing: mean = true needs the bases that it is about")
    if not body.mean and (body.bases or body.nearest is not None or body.local):
        entries.note("bases, nearest and local go with mean = true, and only with it")
    if body.nearest is not None and body.nearest <= 0:
        entries.note("nearest must be above zero")
    return body
