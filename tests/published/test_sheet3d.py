"""The sheet solution: first against the reference tables, then as a judge of tees and bends not fitted."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import dblquad

from layoutgen.formulas.bends import bend_excess, douville_james_1978_mitre
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.tees import tee
from tests.published.sheet3d import capacitance, inductances, potential
from tests.published.sheet_shapes import bend_length, straight_sheet, tee_planes
from tests.published.tables import rows


@pytest.mark.parametrize("at", [(0.2, 0.1, 0.0), (1.5, -0.4, 0.3), (0.3, 0.3, 2.0)])
def test_potential_of_a_triangle(at):
    """The closed form against numerical integration, inside, beside and above."""
    triangle = np.array([[[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]]])
    x, y, z = at
    found = potential(triangle, np.array([[x, y]]), z)[0]
    wanted = (
        dblquad(
            lambda b, a: 1.0 / max(np.sqrt((a - x) ** 2 + (b - y) ** 2 + z * z), 1e-9),
            0.0,
            1.0,
            0.0,
            lambda a: 1.0 - a,
            epsabs=1e-5,
        )[0]
        if z > 0.0
        else _polar(x, y)
    )
    assert found == pytest.approx(wanted, rel=1e-4)


def _polar(x, y):
    """Return the integral about a point inside of the triangle, as one of the distance to its border."""
    angle = np.linspace(0.0, 2.0 * np.pi, 20001)[:-1]
    c, s = np.cos(angle), np.sin(angle)
    with np.errstate(divide="ignore"):
        reach = np.stack([np.where(c < 0, -x / c, 9), np.where(s < 0, -y / s, 9), (1 - x - y) / (c + s)])
    reach[2] = np.where(c + s > 0.0, reach[2], 9.0)
    return float(np.min(reach, axis=0).mean() * 2.0 * np.pi)


@pytest.mark.parametrize("u", [0.6, 2.0])
def test_straight_strip(u):
    """Inductance and capacitance per length of a plain line, within half a per cent of the mesh."""
    short, long = straight_sheet(u, 5.0), straight_sheet(u, 6.0)
    line = hammerstad_jensen_1980(u, 4.4)
    per_length = 0.5 * (inductances(long)[0, 0] - inductances(short)[0, 0])
    z = line.impedance * np.sqrt(line.effective_permittivity) / 376.73
    assert per_length == pytest.approx(z, rel=0.006)
    c = 0.5 * (capacitance(long, 4.4) - capacitance(short, 4.4))
    assert c == pytest.approx(line.effective_permittivity / z, rel=0.006)


@pytest.mark.parametrize("widths", [(1.0, 1.0, 1.0), (2.2, 5.0, 1.0), (1.0, 2.2, 2.2)])
def test_solver_meets_tee_rows(widths):
    """Tables by other methods: planes agree to 0.01 h, which also settles where unequal mains step."""
    row = next(r["value"] for r in rows("tee") if (r["u1"], r["u1b"], r["u2"]) == widths)
    assert tee_planes(*widths) == pytest.approx((row["da"], row["db"], row["d2"]), abs=0.01)


@pytest.mark.parametrize(("u", "mitre"), [(1.0, None), (1.0, 68.85), (2.0, 50.0)])
def test_solver_meets_bend_rows(u, mitre):
    """Tables by other methods, whose inductance is known to 0.015 to 0.02 h: 0.03 h."""
    row = next(r for r in rows("bend") if (r["u"], r["er"], r["mitre_pct"]) == (u, 3.66, mitre))
    found = u + bend_length(u, 90.0, (mitre or 0.0) / 100.0, 3.66)
    assert found == pytest.approx(row["delay_equiv_length_over_h"], abs=0.03)


@pytest.mark.parametrize("seed", range(4))
def test_random_tees(seed):
    """Tees with unequal mains that no fit has seen: 0.03 h on the mains, 0.045 h on the side line."""
    rng = np.random.default_rng(500 + seed)
    widths = [round(float(np.exp(rng.uniform(np.log(0.45), np.log(5.5)))), 3) for _ in range(3)]
    solved, result = tee_planes(*widths, arm=7.0), tee(*widths, 3.66, 0.0)
    assert result.in_range
    assert (result.d_a, result.d_b) == (
        pytest.approx(solved[0], abs=0.03),
        pytest.approx(solved[1], abs=0.03),
    )
    assert result.d_side == pytest.approx(solved[2], abs=0.045)


@pytest.mark.parametrize(
    ("u", "angle", "er"),
    [(0.7, 45.0, 9.8), (1.2, 45.0, 3.55), (2.5, 45.0, 2.2), (0.7, 90.0, 6.15), (2.5, 90.0, 3.0)],
)
def test_bends_at_their_optimal_mitre(u, angle, er):
    """Widths, permittivities and the half angle that the reference table does not have: 0.03 h."""
    mitre = float(douville_james_1978_mitre(u))
    result = bend_excess(u, er, mitre, angle)
    assert result.in_range
    assert result.length_change == pytest.approx(bend_length(u, angle, mitre / 100.0, er), abs=0.03)


def test_a_bend_of_sixty_degrees():
    """The angle between the fitted ones: catches an interpolation that leaves their course."""
    found = bend_excess(1.0, 3.66, 50.0, 60.0).length_change
    assert found == pytest.approx(bend_length(1.0, 60.0, 0.5, 3.66), abs=0.045)
