"""Every check value of the reference table that this version computes, each with its own tolerance and source.

The table stands beside this file with provenance per row. A row without a calculation here is a visible failure.
"""

import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.constants import atm, c, mu_0, zero_Celsius
from scipy.optimize import brentq

from magsafe.design import tables, warmth_tables
from magsafe.physics import (
    air_gap,
    atmosphere,
    conductor,
    convection,
    coupling,
    coupling_loop,
    deratings,
    divided_voltage,
    ground,
    heat,
    inductance,
    matching,
    open_line,
    proximity,
    small_loop,
    strip,
    tuned_circuit,
    warming,
)
from magsafe.physics.near_field import SegmentCurrents

Row = dict[str, Any]

ROWS: list[Row] = tomllib.loads(Path(__file__).with_name("check_values.toml").read_text(encoding="utf-8"))["value"]

MATERIAL_NAMES = {
    "annealed_copper": "annealed copper",
    "hard-drawn_copper": "hard-drawn copper",
    "phosphorus-deoxidised_copper_C12200": "copper tube",
    "aluminium_1350": "aluminium 1350",
    "aluminium_6061-T6": "aluminium 6061-T6",
    "aluminium_6063-T5": "aluminium 6063-T5",
    "aluminium_6063-T6": "aluminium 6063-T6",
    "aluminium_5052": "aluminium 5052",
    "aluminium_3003-O": "aluminium 3003-O",
    "brass_C26000": "brass",
    "phosphor_bronze_C51000": "phosphor bronze",
    "silver": "silver",
    "tin": "tin",
    "solder_60Sn40Pb___63Sn37Pb": "solder 60-40",
    "zinc": "zinc",
    "stainless_steel_304": "stainless steel 304",
}


def _material(row: Row) -> float:
    return float(tables.materials()[MATERIAL_NAMES[row["id"].removeprefix("sigma20_")]].conductivity)


def _round(row: Row) -> float:
    i = row["inputs"]
    impedance = conductor.rod_impedance(i["f_Hz"], i["sigma"], i["diameter_m"] / 2.0)
    if row["id"].startswith("round_R"):
        return float(impedance.real)
    return float(impedance.imag / (2.0 * np.pi * i["f_Hz"]))


def _tube(row: Row) -> float:
    i = row["inputs"]
    return float(conductor.tube_impedance(i["f_Hz"], i["sigma"], i["diameter_m"] / 2.0, i["wall_m"]).real)


def _slab(row: Row) -> float:
    # A tube whose radius is 2 000 000 skin depths is flat to the tolerance of the row.
    depth = float(conductor.skin_depth(1e6, 58e6))
    radius = 2e6 * depth
    thin = conductor.tube_impedance(1e6, 58e6, radius, row["inputs"]["t_over_delta"] * depth)
    return float(thin.real) * 2.0 * np.pi * radius * 58e6 * depth


def _plated(row: Row) -> float:
    i = row["inputs"]
    surface = conductor.plated_surface_impedance(i["f_Hz"], i["sigma_plate"], i["t_plate_m"], i["sigma_base"])
    # The round conductor has the same, spread over its circumference.
    round_one = conductor.plated_impedance(i["f_Hz"], i["sigma_plate"], i["t_plate_m"], i["sigma_base"], 0.5 / np.pi)
    assert complex(round_one) == pytest.approx(complex(surface), rel=1e-12)
    return float(surface.real)


def _row(row: Row) -> float:
    i = row["inputs"]
    return proximity.row_proximity(i["N"], i["spacing_over_diameter"], 1.0).mean_loss_factor - 1.0


def _go_and_return(row: Row) -> float:
    places = np.array([[0.0, 0.0], [row["inputs"]["spacing_over_diameter"], 0.0]])
    return proximity.proximity(places, 1.0, np.array([1.0, -1.0])).mean_loss_factor


def _polygon(row: Row) -> float:
    sides = row["inputs"]["sides"]
    if sides:
        return inductance.polygon_constant(sides)
    # The circle's form, written as a polygon's: ln(2p/a) - L 2 pi / (mu0 p).
    perimeter = 2.0 * np.pi
    own = float(inductance.circle_inductance(1.0, 1e-3))
    return float(np.log(2.0 * perimeter / 1e-3)) - own * 2.0 * np.pi / (mu_0 * perimeter)


def _coaxial(row: Row) -> float:
    i = row["inputs"]
    return float(inductance.coaxial_mutual_inductance(i["a_m"], i["b_m"], i["d_m"]))


def _eccentric(row: Row) -> float:
    i = row["inputs"]
    return inductance.coplanar_mutual_inductance(i["R_main_m"], i["R_coupling_m"], i["offset_m"])


def _radiation(row: Row) -> float:
    i = row["inputs"]
    area = np.pi * (i["diameter_m"] / 2.0) ** 2
    return float(small_loop.radiation_resistance(area, 1, c / i["f_Hz"]))


def _x(row: Row) -> float:
    return float(np.pi * row["inputs"]["C_over_lambda"])


def _line(row: Row) -> float:
    form = {
        "X": small_loop.reactance_taper,
        "Rrad": small_loop.radiation_taper,
        "Rloss": small_loop.loss_taper,
        "Q": small_loop.slope_taper,
    }[row["id"].split("_")[2]]
    return float(form(_x(row)))


def _gap(row: Row) -> float:
    form = small_loop.radiation_taper if "_R_" in row["id"] else small_loop.reactance_taper
    return float(form(_x(row)))


def _gapfree(row: Row) -> float:
    radiation = float(small_loop.radiation_taper(_x(row)))
    if "RoverX2" in row["id"]:
        return radiation / float(small_loop.reactance_taper(_x(row))) ** 2
    return radiation / float(small_loop.loss_taper(_x(row)))


def _loop(row: Row) -> float:
    """The small-loop chain without taper, as the table's worked loops have it."""
    i = row["inputs"]
    radius, f = i["tube_diameter_m"] / 2.0, i["f_Hz"]
    across = i["diameter_m"] / 2.0
    per_metre = conductor.tube_impedance(f, i["sigma"], radius, i["wall_m"])
    length, omega = 2.0 * np.pi * across, 2.0 * np.pi * f
    radiation = float(small_loop.radiation_resistance(np.pi * across**2, 1, c / f))
    loss = float(per_metre.real) * length
    own = float(inductance.circle_inductance(across, radius)) + float(per_metre.imag) * length / omega
    reactance, total = omega * own, radiation + loss + i["esr_ohm"]
    quality = float(tuned_circuit.unloaded_q(total, reactance, 1.0))
    answers: dict[str, Callable[[], float]] = {
        "Rrad": lambda: radiation,
        "Rcond": lambda: loss,
        "L": lambda: own,
        "X": lambda: reactance,
        "Qu": lambda: quality,
        "eff": lambda: radiation / total,
        "eff_dB": lambda: 10.0 * float(np.log10(radiation / total)),
        "C": lambda: 1.0 / (omega * reactance),
        "I_rms": lambda: float(tuned_circuit.port_current(i["P_W"], total)),
        "V_peak": lambda: float(tuned_circuit.peak_voltage(i["P_W"], total, reactance)),
        "BW_3dB_matched": lambda: 2.0 * f / quality,
        "BW_swr2": lambda: float(tuned_circuit.swr_bandwidth_factor(2.0)) * f / quality,
        "chu": lambda: float(tuned_circuit.chu_bound(omega / c * (across + radius))),
    }
    return answers[row["id"].split("_", 1)[1]]()


def _image(row: Row) -> Any:
    heights = 4.0 * np.pi * np.asarray(row["inputs"]["h_over_lambda"])
    vertical_loop = row["inputs"]["loop"].startswith("vertical")
    return (ground.image_ratio_vertical if vertical_loop else ground.image_ratio_horizontal)(heights)


def _ring_q(row: Row) -> float:
    # Q (kR)^3 of a thin lossless ring is omega L / Rrad times (kR)^3, whatever the size.
    radius, thickness, wavelength = 1.0, row["inputs"]["a_over_R"], 1e3
    reactance = 2.0 * np.pi * c / wavelength * inductance.circle_inductance(radius, thickness)
    resistance = small_loop.radiation_resistance(np.pi * radius**2, 1, wavelength)
    return float(tuned_circuit.unloaded_q(resistance, reactance, 1.0)) * (2.0 * np.pi / wavelength) ** 3


def _ring(row: Row) -> float:
    i = row["inputs"]
    outside = float(inductance.circle_inductance(i["radius_m"], i["wire_radius_m"]))
    if row["id"].startswith("ring_dc"):
        # Uniform direct current adds mu0/8pi for each metre inside the wire (any textbook); what else differs is of
        # second order in the thickness, 4e-6 here.
        return float(outside + mu_0 * i["radius_m"] / 4.0)
    return outside


def _uniform_gap(row: Row) -> float:
    i = row["inputs"]
    if row["id"].endswith("2000m_35C"):
        return float(air_gap.uniform_breakdown(i["gap_m"], atmosphere.relative_air_density(2000.0, 308.15)))
    factor = deratings.RADIO_FREQUENCY.factor if row["id"].endswith("_rf") else 1.0
    return factor * float(air_gap.uniform_breakdown(i["gap_m"], i.get("delta", 1.0)))


def _air_density(row: Row) -> float:
    i = row["inputs"]
    assert float(atmosphere.standard_pressure(i["altitude_m"])) == pytest.approx(i["p_Pa"], rel=1e-6)
    return float(atmosphere.relative_air_density(i["altitude_m"], i["T_K"]))


def _edge_onset(row: Row) -> float:
    return float(air_gap.edge_onset(row["inputs"]["gap_m"], row["inputs"]["thickness_m"], 1.0))


def _air_share(row: Row) -> float:
    i = row["inputs"]
    field = divided_voltage.air_field(1.0, i["d_air_m"], np.array([i["d_dielectric_m"]]), np.array([i["eps_r"]]))
    return float(field * i["d_air_m"])


def _stub(row: Row) -> float:
    # The rows of the capacitance leave out the cable, which is that of the resistances.
    cable = next(r for r in ROWS if r["id"] == row["id"].replace("Ceff", "ESR"))["inputs"]
    f, inner, outer = cable["f_Hz"], cable["inner_radius_m"], cable["outer_radius_m"]
    # The table takes both surfaces as flat; `coaxial_line` has their curvature, which another test holds.
    flat = [
        complex(conductor.plated_surface_impedance(f, sigma, 0.0, sigma)) / (2.0 * np.pi * radius)
        for sigma, radius in ((cable["sigma_inner"], inner), (cable["sigma_outer_effective"], outer))
    ]
    made = open_line.coaxial_line(f, inner, outer, cable["eps_r"], cable["tan_delta"], 1e20, 1e20)
    perfect = 1j * np.imag(made.series_impedance)
    line = open_line.Line(np.asarray(perfect + sum(flat)), made.shunt_admittance)
    impedance = open_line.open_impedance(line, cable["length_m"])
    if "ESR" in row["id"]:
        return float(np.real(impedance))
    return float(open_line.effective_capacitance(f, impedance))


def _sleeve(row: Row) -> float:
    i = row["inputs"]
    one = open_line.coaxial_capacitance(i["inner_radius_m"], i["outer_radius_m"], i["eps_r"])
    return float(one) * float(i["length_m"])


def _nusselt(row: Row) -> float:
    # The air and the cylinder that have these numbers, with 20 K between them.
    i = row["inputs"]
    film = float(brentq(lambda t: float(convection.dry_air(t, atm).prandtl) - i["Pr"], 250.0, 400.0, xtol=1e-12))
    one = float(convection.rayleigh_number(1.0, film + 10.0, film - 10.0, atm))
    diameter = float(np.cbrt(i["Ra"] / one))
    taken = float(convection.convected_heat(diameter, film + 10.0, film - 10.0, atm))
    return taken / (np.pi * float(convection.dry_air(film, atm).conductivity) * 20.0)


def _taken_by_air(row: Row) -> float:
    i = row["inputs"]
    return float(convection.convected_heat(i["D_m"], i["Ts_K"], i["Ta_K"], atm))


def _radiated(row: Row) -> float:
    i = row["inputs"]
    surface = heat.Surface(i["D_m"], i["D_m"], i["emissivity"], 0.0)
    return float(heat.radiated_heat(i["Ts_K"], surface, heat.Surroundings(i["Ta_K"], atm)))


def _steady(row: Row) -> float:
    i = row["inputs"]
    resistance = conductor.tube_impedance(i["f_Hz"], i["sigma20"], i["D_m"] / 2.0, i["wall_m"]).real
    found = heat.steady_temperature(
        heat.ElectricHeat(i["I_rms_A"] ** 2 * resistance, i["alpha20"]),
        heat.Surface(i["D_m"], i["D_m"], i["emissivity"], i["absorptivity"]),
        heat.Surroundings(i["Ta_C"] + zero_Celsius, atm, i["sun_W_m2"]),
    )
    return float(found) - zero_Celsius


def _capacity(row: Row) -> float:
    radius, wall = row["inputs"]["D_m"] / 2.0, row["inputs"]["wall_m"]
    metal = warmth_tables.metals()["copper tube"]
    section = np.pi * (radius**2 - (radius - wall) ** 2)
    return float(warming.heat_capacity_per_metre(section, metal.density, metal.specific_heat))


def _drift(row: Row) -> float:
    i = row["inputs"]
    assert i["alpha_per_K"] == warmth_tables.metals()["copper tube"].expansion
    ends = heat.frequency_drift(i["f_Hz"], i["alpha_per_K"], i["dT_K"])
    return float(ends[1] if "_LC_" in row["id"] else ends[0])


def _coupling_size(row: Row) -> float:
    """The small-loop resistance and an even current, as the table has it: 240 sides of a circle's area."""
    i = row["inputs"]
    across, radius, f = i["D_m"] / 2.0, i["tube_diameter_m"] / 2.0, i["f_Hz"]
    loss = float(conductor.tube_impedance(f, i["sigma"], radius, i["wall_m"]).real) * 2.0 * np.pi * across
    total = float(small_loop.radiation_resistance(np.pi * across**2, 1, c / f)) + loss + i["esr_ohm"]
    angle = 2.0 * np.pi / 240 * np.arange(240)
    corners = np.stack([np.cos(angle), np.sin(angle), 0.0 * angle], axis=1)
    nodes, even = across * np.sqrt(angle[1] / np.sin(angle[1])) * corners, np.ones(240, dtype=np.complex128)
    currents = SegmentCurrents(nodes, np.roll(nodes, -1, axis=0), even, even, radius)
    axis, edge = np.array([0.0, 0.0, 1.0]), np.array([-across, 0.0, 0.0])
    centred = "_centre_" in row["id"]
    place = coupling_loop.centred(0.0 * edge, axis) if centred else coupling_loop.beside(edge, -edge, axis, 0.01)
    found = coupling_loop.matching_size(coupling_loop.Circuit(currents, f, total, i["Z0"]), place, 0.002).matched
    assert found is not None
    return found.diameter / float(i["D_m"])


def _coupling_reactance(row: Row) -> float:
    i = row["inputs"]
    return float(coupling.matching_mutual_reactance(i["R_ohm"], i.get("Xc_ohm", 0.0), i["Z0"]))


def _coupling_detuning(row: Row) -> float:
    i = row["inputs"]
    return float(coupling.best_tuned_reactance(1.0, i["Xc_ohm"], i["R_ohm"], i["Z0"]))


def _two_capacitors(row: Row) -> float:
    i = row["inputs"]
    match = matching.capacitor_match(complex(i["R_ohm"], i["X_ohm"]), i["f_Hz"], i["Z0"])
    return match.parallel if "_Cpar_" in row["id"] else match.series


def _turns(row: Row) -> float:
    # The ratio of turns whose square, as a ratio of impedances, brings the load to the line.
    i = row["inputs"]
    squared = brentq(lambda n: float(matching.impedance_through_transformer(i["Zl"], n).real) - i["Z0"], 1.0, 4.0)
    return float(np.sqrt(float(squared)))


CALCULATIONS: dict[str, Callable[[Row], Any]] = {
    "stub_": _stub,
    "coaxial_sleeve": _sleeve,
    "Nu_cyl": _nusselt,
    "tube22_conv": _taken_by_air,
    "tube22_rad": _radiated,
    "heat_capacity": _capacity,
    "heat_": _steady,
    "thermal_drift": _drift,
    "sigma20_": _material,
    "skin_depth_": lambda row: float(conductor.skin_depth(row["inputs"]["f_Hz"], row["inputs"]["sigma"])),
    "round_": _round,
    "tube_R": _tube,
    "slab_min": _slab,
    "strip_factor": lambda row: strip.crowding_factor(float(row["inputs"]["w_over_t"]), 1.0),
    "prox_": _row,
    "plated_": _plated,
    "antiparallel_pair": _go_and_return,
    "polygon_phi": _polygon,
    "ring_dc": _ring,
    "circle_L_hf": _ring,
    "M_coax": _coaxial,
    "M_eccentric": _eccentric,
    "Rrad_small": _radiation,
    "gap_for": lambda row: float(air_gap.uniform_gap(row["inputs"]["V_peak"], 1.0)),
    "gap_": _gap,
    "gapfree": _gapfree,
    "Vb_": _uniform_gap,
    "air_density": _air_density,
    "edge_factor": lambda row: float(air_gap.edge_factor(row["inputs"]["t_over_s"])),
    "edge_onset": _edge_onset,
    "ekstrand_rf_ratio_low": lambda _: deratings.RADIO_FREQUENCY.factor,
    "series_gap_air": _air_share,
    "swr_bw_matched": lambda row: float(tuned_circuit.swr_bandwidth_factor(row["inputs"]["S"])),
    "loop_Q": _ring_q,
    "loop": _loop,
    "ground_pec": _image,
    "chu_": lambda row: float(tuned_circuit.chu_bound(row["inputs"]["ka"])),
    "coupling_ratio": _coupling_size,
    "coupling_wM": _coupling_reactance,
    "coupling_detune": _coupling_detuning,
    "two_cap": _two_capacitors,
    "quarter_wave": lambda row: float(matching.quarter_wave_impedance(row["inputs"]["Zl"], row["inputs"]["Z0"])),
    "turns_ratio": _turns,
    "swr_112": lambda row: float(tuned_circuit.standing_wave_ratio(row["inputs"]["Zl"] + 0j, row["inputs"]["Z0"])),
    "swr_mismatch": lambda row: -10.0 * float(np.log10(matching.mismatch_share(row["inputs"]["S"]))),
    "eta0": lambda _: small_loop.FREE_SPACE_IMPEDANCE,
    "line_model": _line,
    # The half-power points of a matched loop lie where the SWR is 3 + 2 sqrt 2: bandwidth 2 f/Q.
    "gamma_halfpower": lambda row: 3.0 + float(tuned_circuit.swr_bandwidth_factor(row["value"])) * 2**0.5,
}

# The gap-free rows are full-wave values, and the closed forms are stated to lie this far below them at a quarter
# wavelength (reference notes, section 3), less at smaller sizes.
CLOSED_FORM_SHORTFALL = {"gapfree_RoverX2": 0.009, "gapfree_RradRcond_growth": 0.029}


@pytest.mark.parametrize("row", ROWS, ids=[row["id"] for row in ROWS])
def test_check_value(row: Row) -> None:
    calculate = next(f for prefix, f in CALCULATIONS.items() if row["id"].startswith(prefix))
    found, wanted = np.asarray(calculate(row)), np.asarray(row["value"])
    short = next((s for k, s in CLOSED_FORM_SHORTFALL.items() if row["id"].startswith(k)), 0.0)
    if short:
        size = row["inputs"]["C_over_lambda"]
        below = wanted * (1.0 - short * (size / 0.25) ** 2 - row["rtol"])
        assert below <= found <= wanted * (1.0 + row["rtol"])
        return
    np.testing.assert_allclose(found, wanted, rtol=row.get("rtol", 0.0), atol=row.get("atol", 0.0))


def test_the_table_carries_its_provenance() -> None:
    for row in ROWS:
        assert row["provenance"] in ("seen", "memory", "computed"), row["id"]
        assert row["source"], row["id"]
