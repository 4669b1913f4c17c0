"""Every row of the field-solved tables that a formula covers, at the accuracy the formula states."""

from __future__ import annotations

import numpy as np

from layoutgen.formulas.bends import bend_excess
from layoutgen.formulas.coupled import coupled_pair
from layoutgen.formulas.ends import hammerstad_open_end, kirschning_jansen_koster_1981, open_end
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.pour import grounded_coplanar, microstrip_beside_pour
from layoutgen.formulas.steps import step
from layoutgen.formulas.tees import FIELD_FIT, tee
from layoutgen.formulas.vias import goldfarb_pucel_1991, via_inductance
from tests.published.tables import columns, worst


def test_microstrip_with_thickness_meets_the_table():
    """A wrong coefficient or a dropped thickness term moves rows by far more than the stated accuracy."""
    u, t, er, z, ee = columns("microstrip", "u", "t_over_h", "er", "Z0", "eeff")
    line = hammerstad_jensen_1980(u, er, t)
    assert worst(line.impedance, z) < 0.003
    assert worst(line.effective_permittivity, ee) < 0.007
    assert line.in_range.all()


def test_thin_microstrip_is_better_than_a_permille():
    """Catches errors that the looser limit of the thick rows would hide."""
    u, t, er, z, ee = columns("microstrip", "u", "t_over_h", "er", "Z0", "eeff")
    thin = t == 0.0
    line = hammerstad_jensen_1980(u[thin], er[thin])
    assert worst(line.impedance, z[thin]) < 0.001
    assert worst(line.effective_permittivity, ee[thin]) < 0.002


def test_pour_at_equal_gaps_meets_the_table():
    """Catches errors in the blend, in the conformal mapping or in the side walls' term."""
    u, t, s, er, z, ee = columns("gcpw", "u", "t_over_h", "s_over_h", "er", "Z0", "eeff")
    line = microstrip_beside_pour(u, er, t, s, s)
    assert worst(line.impedance, z) < 0.004
    assert worst(line.effective_permittivity, ee) < 0.008
    assert line.in_range.all()


def test_grounded_coplanar_is_the_same_model():
    """A line kind of its own must not drift away from the line beside a pour."""
    u, t, s, er = columns("gcpw", "u", "t_over_h", "s_over_h", "er")
    kind, beside = grounded_coplanar(u, er, t, s), microstrip_beside_pour(u, er, t, s, s)
    assert np.array_equal(kind.impedance, beside.impedance)


def test_pour_at_unequal_gaps_meets_the_table():
    """Without the crowding term narrow strips err by 0.8 %; left and right must count alike."""
    keys = ("u", "t_over_h", "s_left", "s_right", "er", "Z0", "eeff")
    u, t, left, right, er, z, ee = columns("gcpw_asym", *keys)
    line, mirrored = (
        microstrip_beside_pour(u, er, t, left, right),
        microstrip_beside_pour(u, er, t, right, left),
    )
    assert worst(line.impedance, z) < 0.004
    assert worst(line.effective_permittivity, ee) < 0.008
    assert worst(mirrored.impedance, line.impedance) < 1e-12


def test_coupled_pair_meets_the_table():
    """Catches the misprints of the paper's reprints and a thickness that is ignored (14 % at small gaps)."""
    keys = ("u", "t_over_h", "s_over_h", "er", "Z0e", "eeff_e", "Z0o", "eeff_o")
    u, t, g, er, z_even, ee_even, z_odd, ee_odd = columns("coupled", *keys)
    pair = coupled_pair(u, g, er, t)
    assert worst(pair.z_even, z_even) < 0.011
    assert worst(pair.z_odd, z_odd) < 0.011
    assert worst(pair.ee_even, ee_even) < 0.011
    assert worst(pair.ee_odd, ee_odd) < 0.011
    assert pair.in_range.all()


def test_open_end_meets_the_table_where_the_published_forms_do_not():
    """Catches a return to the published value, which is up to .055 h short."""
    u, er, wanted = columns("openend", "u", "er", "dl_over_h")
    assert np.max(np.abs(open_end(u, er) - wanted)) < 0.006
    assert np.all(wanted - kirschning_jansen_koster_1981(u, er) > 0.014)
    assert np.max(wanted - hammerstad_open_end(u, er)) > 0.1


def test_published_open_ends_have_their_published_values():
    """Catches a slip in a coefficient of the two published forms, digit by digit."""
    u, er, kjk, hammerstad = columns("openend", "u", "er", "KJK81", "Hammerstad")
    assert np.max(np.abs(kirschning_jansen_koster_1981(u, er) - kjk)) < 6e-4
    assert np.max(np.abs(hammerstad_open_end(u, er) - hammerstad)) < 6e-4


def test_bend_meets_the_table():
    """Catches a centre-line left uncorrected (.6 to 1.2 h) and a mitre that has no effect."""
    u, er, mitre, length = columns("bend", "u", "er", "mitre_pct", "delay_equiv_length_over_h")
    result = bend_excess(u, er, np.nan_to_num(mitre))
    assert np.max(np.abs(u + result.length_change - length)) < 0.02
    assert result.in_range.all()


def test_tee_planes_and_susceptance_meet_the_table():
    """Catches exchanged mains, a plane of the wrong sign, a susceptance without the planes' share."""
    keys = ("u1", "u1b", "u2", "er", "value.da", "value.db", "value.d2", "value.B")
    u_a, u_b, u_side, er, d_a, d_b, d_side, b = columns("tee", *keys)
    result = tee(u_a, u_b, u_side, er, 1e6)
    for found, wanted in ((result.d_a, d_a), (result.d_b, d_b), (result.d_side, d_side)):
        assert np.max(np.abs(found - wanted)) < 0.016
    assert np.max(np.abs(result.susceptance * 1e3 - b)) < 0.06
    assert np.all(result.model == FIELD_FIT)
    assert result.in_range.all()


def test_tees_of_random_widths():
    """Catches a change of the terms for unequal mains, which the reference table samples thinly."""
    keys = ("u_a", "u_b", "u_side", "d_a", "d_b", "d_side")
    u_a, u_b, u_side, d_a, d_b, d_side = columns("tee_random", *keys)
    result = tee(u_a, u_b, u_side, 3.66, 0.0)
    assert result.in_range.all()
    usual = np.max([u_a, u_b, u_side], axis=0) <= 6.0
    for found, wanted, limit in (
        (result.d_a, d_a, 0.016),
        (result.d_b, d_b, 0.016),
        (result.d_side, d_side, 0.04),
    ):
        assert np.max(np.abs(found - wanted)[usual]) < limit
        assert np.max(np.abs(found - wanted)) < 0.07


def test_bends_of_two_angles_and_any_mitre():
    """Catches a change of the fit where the reference table, right angles of u 1 and 2, has no rows."""
    keys = ("angle_deg", "u", "er", "mitre_pct", "length_change_over_h")
    angle, u, er, mitre, wanted = columns("bend_angles", *keys)
    result = bend_excess(u, er, mitre, angle)
    off = np.abs(result.length_change - wanted)[result.in_range]
    assert result.in_range.mean() > 0.8
    assert np.max(off) < 0.03
    assert np.max(off[angle[result.in_range] == 90.0]) < 0.021


def test_step_meets_the_table_in_either_order():
    """Catches a swap of the two lines and excess values taken from the books (off by 2 to 4 times)."""
    u_1, u_2, er, d_1, d_2 = columns("step", "u1", "u2", "er", "value.d1", "value.d2")
    result, swapped = step(u_1, u_2, er), step(u_2, u_1, er)
    assert np.max(np.abs(result.d_1 - d_1)) < 0.016
    assert np.max(np.abs(result.d_2 - d_2)) < 0.016
    assert np.array_equal(swapped.d_1, result.d_2)
    assert np.array_equal(swapped.d_2, result.d_1)


def test_via_with_its_plane_at_the_axis_meets_the_table():
    """Catches a reference plane at the via's edge, which moves the value by up to three times."""
    u, r, wanted = columns("via", "u", "r_over_h", "L_via_nH_per_mm")
    h = 0.508e-3
    found = via_inductance(r * h, h, u * h) / h * 1e6
    assert worst(found, wanted) < 0.15
    published = goldfarb_pucel_1991(r * h, h) / h * 1e6
    assert worst(published, wanted) > 1.0
