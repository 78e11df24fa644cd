"""Exposure limits and the time they are averaged over, as data with edition and source.

SI floats and the standard library only. Field limits are RMS, power is that of the envelope's
crest unless it says "averaged", times are in seconds, shares are fractions 0..1.
"""

from magsafe.rules.body import BodyMean
from magsafe.rules.current import Current, Who
from magsafe.rules.duty import (
    Mode,
    OnAirShare,
    Over,
    Pattern,
    TuneUp,
    UnknownMode,
    averaged_power,
    judged_power,
    mode_duty,
    mode_named,
    mode_names,
    window_share,
    worst_window_share,
    worst_window_share_of_shorter_overs,
)
from magsafe.rules.exemption import Exemption
from magsafe.rules.limit import (
    FieldKind,
    Limit,
    Rule,
    RuleFileError,
    UnknownRule,
    load_rule,
    parse_rule,
    rule_names,
)
from magsafe.rules.segment import Provenance, Segment
from magsafe.rules.summation import Summation
from magsafe.rules.table import TableError, UnknownName
from magsafe.rules.tier import Tier, Without

__all__ = [
    "BodyMean",
    "Current",
    "Exemption",
    "FieldKind",
    "Limit",
    "Mode",
    "OnAirShare",
    "Over",
    "Pattern",
    "Provenance",
    "Rule",
    "RuleFileError",
    "Segment",
    "Summation",
    "TableError",
    "Tier",
    "TuneUp",
    "UnknownMode",
    "UnknownName",
    "UnknownRule",
    "Who",
    "Without",
    "averaged_power",
    "judged_power",
    "load_rule",
    "mode_duty",
    "mode_named",
    "mode_names",
    "parse_rule",
    "rule_names",
    "window_share",
    "worst_window_share",
    "worst_window_share_of_shorter_overs",
]
