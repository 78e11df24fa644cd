"""Whom a rule has limits for, in its own words, and for whom it has none."""

from dataclasses import dataclass

from magsafe.rules.current import WHO, Who
from magsafe.rules.segment import PROVENANCES, Provenance
from magsafe.rules.table import Entries


@dataclass(frozen=True, slots=True)
class Tier:
    """Whom a tier means: in the rule's own words, and what that says, told in ours."""

    who: Who
    own_words: str
    meaning: str
    provenance: Provenance
    provenance_detail: str


@dataclass(frozen=True, slots=True)
class Without:
    """A tier for which a rule has no limits, and where to look instead."""

    who: Who
    why: str


def read_tier(entries: Entries) -> Tier:
    """A tier; what is wrong with it is noted in `entries`."""
    tier = Tier(
        who=entries.word("who", WHO),
        own_words=entries.text("own_words"),
        meaning=entries.text("meaning"),
        provenance=entries.word("provenance", PROVENANCES),
        provenance_detail=entries.text("provenance_detail"),
    )
    entries.refuse_leftover()
    return tier


def read_without(entries: Entries) -> Without:
    """A tier without limits; what is wrong with it is noted in `entries`."""
    without = Without(who=entries.word("who", WHO), why=entries.text("why"))
    entries.refuse_leftover()
    return without
