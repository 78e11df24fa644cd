"""A rule made up for tests: its file, read, and what is wrong with it once it was spoilt."""

import pytest

from magsafe.rules import Rule, RuleFileError, parse_rule

SOUND = """\
name = "harbour"
title = "A rule made up for this test"
jurisdiction = "nowhere"
standard = "Harbour by-law 1"
edition = "1"
holds_from = "2020-01"
how_judged = "each field by itself"

[summation]
fields = "together"
together_up_to = "10 MHz"
source = "Harbour by-law 1, table 3"
provenance = "memory"
provenance_detail = "nobody has read it"

[body]
mean = true
bases = ["thermal whole-body"]
nearest = "20 cm"
local = "head and feet"
source = "Harbour by-law 1, table 4"
provenance = "memory"
provenance_detail = "nobody has read that either"

[[without]]
who = "trained"
why = "the crew have a by-law of their own"

[[tier]]
who = "public"
own_words = "visitors"
meaning = "whoever is not crew"
provenance = "memory"
provenance_detail = "made up"

[[limit]]
who = "public"
field = "electric"
basis = "thermal whole-body"
unit = "V/m"
averaging_time = "6 min"
edition = "1"
source = "Harbour by-law 1, table 1"
provenance = "verified"
provenance_detail = "the by-law"
segments = [
  { band = ["1 MHz", "2 MHz"], coefficient = 50, exponent = 0 },
  { band = ["2 MHz", "30 MHz"], coefficient = 90, exponent = -1 },
]
"""


def parse(text: str) -> Rule:
    return parse_rule(text.encode(), "harbour.toml")


def problems_of(text: str) -> tuple[str, ...]:
    with pytest.raises(RuleFileError, match=r"harbour\.toml") as refused:
        parse(text)
    return refused.value.problems
