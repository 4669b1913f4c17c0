"""scikit-rf's microstrip line, where its own traps do not bite.

Its traps, avoided here: dispersion by the effective width unless told otherwise, other quasi-static models
14 to 16 % off with thickness, no conductor loss at all with ``t=None``, NaN at a permittivity of 1.
"""

from __future__ import annotations

import numpy as np
import pytest

from layoutgen.formulas.loss import dielectric_attenuation, hammerstad_jensen_1980_conductor_attenuation
from layoutgen.formulas.microstrip import (
    hammerstad_jensen_1980,
    jansen_kirschning_1983_impedance,
    kirschning_jansen_1982_permittivity,
)

CASES = [(9.9, 0.5e-3, 0.483e-3), (2.2, 1.27e-3, 3.91e-3), (3.5, 0.508e-3, 1.147e-3), (4.4, 1.6e-3, 0.8e-3)]


def library_line(er, h, w, t=None, **options):
    """Return scikit-rf's line from 1 to 20 GHz, with the frequency-independent dielectric."""
    import skrf

    frequency = skrf.Frequency(1, 20, 20, unit="GHz")
    settings = {"model": "hammerstadjensen", "disp": "kirschningjansen", "diel": "frequencyinvariant"}
    return skrf.media.MLine(frequency, w=w, h=h, t=t, ep_r=er, **(settings | options))


@pytest.mark.parametrize(("er", "h", "w"), CASES)
def test_quasi_static_values(er, h, w):
    """The same paper by other hands: catches a coefficient that no table row is sensitive to."""
    line = hammerstad_jensen_1980(w / h, er)
    other = library_line(er, h, w, rho=None)
    assert np.real(other.zl_eff) == pytest.approx(float(line.impedance), rel=1e-6)
    assert np.real(other.ep_reff) == pytest.approx(float(line.effective_permittivity), rel=1e-6)


@pytest.mark.parametrize(("er", "h", "w"), CASES)
def test_dispersion_of_permittivity_and_impedance(er, h, w):
    """Both dispersion papers by other hands, over 1 to 20 GHz; here its effective width equals the width."""
    other = library_line(er, h, w, rho=None)
    fh = other.frequency.f * h
    line = hammerstad_jensen_1980(w / h, er)
    ee = line.effective_permittivity
    ee_f = kirschning_jansen_1982_permittivity(ee, w / h, er, fh)
    assert ee_f == pytest.approx(other.ep_reff_f.real, rel=1e-5)
    z_f = jansen_kirschning_1983_impedance(line.impedance, ee, ee_f, w / h, er, fh)
    assert z_f == pytest.approx(other.z0_characteristic.real, rel=2e-4)


@pytest.mark.parametrize(("er", "h", "w"), CASES)
def test_loss(er, h, w):
    """Dielectric loss, and conductor loss with current distribution and roughness, in Np/m."""
    rho, rough, tand = 1.0 / 58e6, 1e-6, 0.003
    other = library_line(er, h, w, t=35e-6, rho=rho, rough=rough, tand=tand)
    f = other.frequency.f
    dielectric = dielectric_attenuation(f, er, other.ep_reff_f.real, tand)
    assert dielectric == pytest.approx(other.alpha_dielectric, rel=2e-3)
    z = other.z0_characteristic.real
    conductor = hammerstad_jensen_1980_conductor_attenuation(f, z, w, 58e6, rough)
    assert conductor == pytest.approx(other.alpha_conductor, rel=2e-3)
    assert np.all(conductor > 0.0)
