"""The charts of a page: drawn where their numbers are, told in words, the same on every run."""

import re
from math import log10
from xml.etree import ElementTree

import numpy as np
import pytest

from magsafe.checks.ladder import Ladder, Rung
from magsafe.checks.swr_curve import SwrCurve
from magsafe.physics.tuned_circuit import detuned_impedance, standing_wave_ratio
from magsafe.reports.charts import MOST_RUNGS, WIDTH, ladder_picture, swr_picture
from magsafe.reports.page import Picture

SVG = "{http://www.w3.org/2000/svg}"
RUNGS = (
    Rung("capacitor.voltage", None, 20.0, 45.0, lowest=True, known=True),
    Rung("exposure.us-fcc.public.bench", "bench", 80.0, 126.0, lowest=False, known=False),
    Rung("conductor.corona", None, 900.0, None, lowest=False, known=True),
)


def drawn(picture: Picture, name: str) -> ElementTree.Element:
    return next(each for each in ElementTree.fromstring(picture.svg).iter() if each.get("id") == name)


def path(picture: Picture, name: str) -> np.ndarray:
    """Return the points of a line, shape (n, 2)."""
    data = next(drawn(picture, name).iter(f"{SVG}path")).get("d") or ""
    return np.array(re.findall(r"[ML] ([-.\d]+) ([-.\d]+)", data), dtype=float)


def dot(picture: Picture, name: str) -> float:
    """Return where a dot is, across."""
    return float(next(drawn(picture, name).iter(f"{SVG}use")).get("x") or "nan")


def words(picture: Picture) -> str:
    return " ".join("".join(each.itertext()) for each in ElementTree.fromstring(picture.svg).iter(f"{SVG}text"))


def test_a_rung_is_drawn_at_its_power_on_one_scale_of_logarithms() -> None:
    picture = ladder_picture(Ladder(0, 100.0, RUNGS, ()), "40 m")
    assert picture is not None
    at = {float(w): path(picture, f"watts-{w}")[0, 0] for w in ("20", "50", "100", "500", "1000")}
    scale = (at[1000.0] - at[100.0]) / 1.0
    zero = at[100.0] - 2.0 * scale
    assert at[500.0] == pytest.approx(zero + scale * log10(500.0), abs=0.02)
    for number, rung in enumerate(RUNGS, 1):
        assert dot(picture, f"margin-{number}") == pytest.approx(zero + scale * log10(rung.at_margin), abs=0.02)
        if rung.at_limit:
            assert path(picture, f"limit-{number}")[0, 0] == pytest.approx(
                zero + scale * log10(rung.at_limit), abs=0.02
            )
    assert path(picture, "planned")[0, 0] == pytest.approx(at[100.0], abs=0.02)
    for told in (
        "capacitor.voltage: 20 W",
        "exposure.us-fcc.public, bench: 80 W, not proven",
        "conductor.corona: 900 W",
    ):
        assert told in words(picture)
        assert told.split(":")[0] in picture.alt
    assert "limit at 45 W" in picture.alt


def test_the_lowest_is_drawn_first_and_what_is_left_out_is_told() -> None:
    many = tuple(Rung(f"check.{i}", None, 10.0 + i, None, lowest=i == 0, known=True) for i in range(MOST_RUNGS + 3))
    picture = ladder_picture(Ladder(0, 5.0, many, ()), "40 m")
    assert picture is not None
    assert "check.0" in words(picture)
    assert f"check.{MOST_RUNGS}" not in words(picture)
    assert "3 more" in picture.caption
    assert ladder_picture(Ladder(0, 5.0, (), ()), "40 m") is None


def test_a_name_without_end_stays_within_the_picture() -> None:
    rung = Rung("joint.heat." + "w" * 300, "w" * 10_000, 20.0, None, lowest=True, known=False)
    picture = ladder_picture(Ladder(0, 100.0, (rung,), ()), "40 m")
    assert picture is not None
    assert max(len(each) for each in words(picture).split()) < 60
    assert words(picture).count("...") >= 1
    assert "20 W, not proven" in words(picture)


def curve(likely: float = 800.0) -> SwrCurve:
    width = 7.1e6 / (2.0**0.5 * likely)
    offset = np.linspace(-4.0, 4.0, 321) * width
    ratios = [standing_wave_ratio(detuned_impedance(offset, 7.1e6, q), 1.0) for q in (likely, 1200.0)]
    return SwrCurve(7.1e6, offset, ratios[0], ratios[1], None, width)


def test_the_curve_passes_two_at_the_ends_of_the_width() -> None:
    made = curve()
    picture = swr_picture(made, "40 m")
    line = path(picture, "likely")
    one, two, ten = (float(path(picture, f"ratio-{ratio}")[0, 1]) for ratio in (1, 2, 10))
    assert line[:, 1].max() == pytest.approx(one, abs=0.02)
    assert line[:, 1].min() == pytest.approx(ten, abs=1.5)
    assert (one - two) / (one - ten) == pytest.approx(log10(2.0), abs=1e-3)
    lowest = int(line[:, 1].argmax())
    right = float(np.interp(-two, -line[lowest:, 1], line[lowest:, 0]))
    left = float(np.interp(-two, -line[: lowest + 1, 1][::-1], line[: lowest + 1, 0][::-1]))
    kilohertz = path(picture, "hertz-10000")[0, 0] - path(picture, "hertz-0")[0, 0]
    assert (right - left) / kilohertz * 10e3 == pytest.approx(made.width, rel=0.01)
    assert np.ptp(path(picture, "narrowest")[:, 0]) < np.ptp(line[:, 0])
    assert "The widest end is not known" in picture.caption
    assert "7.1 MHz" in words(picture)


def test_a_chart_is_the_same_on_every_run_and_as_large_as_it_says() -> None:
    first, second = (swr_picture(curve(), "40 m") for _ in range(2))
    assert first == second
    root = ElementTree.fromstring(first.svg)
    assert root.get("width") == f"{WIDTH:.2f}mm"
    assert root.get("height") == f"{first.height:.2f}mm"
    assert root.find(f"{SVG}desc") is not None
