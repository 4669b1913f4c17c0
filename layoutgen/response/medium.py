"""The drawn board as a medium: what a cross-section is worth at every frequency of a batch.

In: substrate and copper, frequencies (B,). Out: impedances [ohm] and complex wave numbers [rad/m] of lines,
pairs and posts. Impedances are the quasi-static ones, as the contract defines a line's impedance (the
power-current definition would move them by less than 0.5 % up to 2 GHz mm); effective permittivities are
dispersive. The conductor's loss is Hammerstad and Jensen's, with roughness.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np

from layoutgen.circuit import Circuit
from layoutgen.formulas.constants import C0
from layoutgen.formulas.coupled import coupled_pair, kirschning_jansen_1984_permittivity
from layoutgen.formulas.loss import dielectric_attenuation, hammerstad_jensen_1980_conductor_attenuation
from layoutgen.formulas.microstrip import kirschning_jansen_1982_permittivity
from layoutgen.formulas.pour import microstrip_beside_pour
from layoutgen.formulas.radial import radial_stub_line, radial_stub_reactance
from layoutgen.response.chain import Chain, ComplexArray, FloatArray, line, series

__all__ = ["LineSection", "Medium", "medium_of"]

_Quantity = float | FloatArray
_Key = tuple[float, float, float]


@dataclass(frozen=True, slots=True, eq=False)
class LineSection:
    """A uniform line: impedance [ohm] and wave number beta - j alpha [rad/m], numbers or shape (B,)."""

    impedance: FloatArray
    wave_number: ComplexArray | FloatArray

    def chain(self, length: _Quantity) -> Chain:
        """Return the chain parameters of a length [m].

        A negative length moves a reference plane back; it is taken without loss, for it must not amplify.
        """
        backwards = np.asarray(length) < 0.0
        wave_number = np.where(backwards, np.real(self.wave_number), self.wave_number)
        return line(self.impedance, wave_number * length)


@dataclass(frozen=True, slots=True, eq=False)
class Medium:
    """Substrate and copper; each quantity a number, or of shape (S, 1) for samples beside frequencies (F,).

    Attributes:
        frequencies: Frequencies, shape (F,) [Hz].
        er: Relative permittivity [-].
        loss_tangent: Loss tangent [-].
        height: Substrate height [m].
        thickness: Copper thickness [m].
        conductivity: Copper's conductivity [S/m].
        roughness: Copper's rms roughness [m].
        plating: Thickness of the vias' plating [m]; zero when the rules do not say, for no loss in vias.
        width_change: What etching adds to every width, and takes from every gap [m]; half of it moves each
            edge, so open ends move by half.
        lossless: True leaves all losses out.
    """

    frequencies: FloatArray
    er: _Quantity
    loss_tangent: _Quantity
    height: _Quantity
    thickness: _Quantity
    conductivity: float
    roughness: float
    plating: float = 0.0
    width_change: _Quantity = 0.0
    lossless: bool = False
    _known: dict[_Key, LineSection] = field(default_factory=dict, init=False, repr=False)

    @property
    def shape(self) -> tuple[int, ...]:
        """The shape of everything that depends on frequency and sample."""
        quantities = (self.er, self.loss_tangent, self.height, self.thickness, self.width_change)
        return np.broadcast_shapes(self.frequencies.shape, *(np.shape(value) for value in quantities))

    @property
    def omega(self) -> FloatArray:
        """Angular frequencies [rad/s]."""
        return 2.0 * math.pi * self.frequencies

    @property
    def t(self) -> _Quantity:
        """Copper thickness over substrate height [-]."""
        return self.thickness / self.height

    @property
    def fh(self) -> FloatArray:
        """Frequency times substrate height (B,) [Hz m]."""
        return self.frequencies * self.height

    def u(self, width: float) -> _Quantity:
        """Return a width [m] as etched over the substrate's height [-]."""
        return (width + self.width_change) / self.height

    def line(self, width: float, gap_left: float = math.inf, gap_right: float = math.inf) -> LineSection:
        """Return a line of a width beside pour at two gaps [m], worked out once for each."""
        key = (width, gap_left, gap_right)
        if key not in self._known:
            self._known[key] = self._line(*key)
        return self._known[key]

    def _line(self, width: float, gap_left: float, gap_right: float) -> LineSection:
        """Work out a line."""
        u = self.u(width)
        left, right = ((gap - self.width_change) / self.height for gap in (gap_left, gap_right))
        static = microstrip_beside_pour(u, self.er, self.t, left, right)
        ee = kirschning_jansen_1982_permittivity(static.effective_permittivity, u, self.er, self.fh)
        return self._section(static.impedance, ee, width)

    def pair(self, width: float, gap: float, pour_gap: float) -> tuple[LineSection, LineSection]:
        """Return one strip of a coupled pair in the even and in the odd mode; lengths [m]."""
        u = self.u(width)
        g, s = ((distance - self.width_change) / self.height for distance in (gap, pour_gap))
        static = coupled_pair(u, g, self.er, self.t, s, s)
        modes = kirschning_jansen_1984_permittivity(static.ee_even, static.ee_odd, u, g, self.er, self.fh)
        return (
            self._section(static.z_even, modes[0], width),
            self._section(static.z_odd, modes[1], width),
        )

    def radial(
        self, sector: float, inner: float, outer: _Quantity, dispersion_at: float | None = None
    ) -> Chain:
        """Return a radial stub as an impedance to ground, by the radial-line equation.

        Args:
            sector: Opening angle [rad].
            inner: Inner radius [m].
            outer: Drawn outer radius [m]; its open end is longer.
            dispersion_at: Frequency of the effective permittivity [Hz]; None: each frequency's own.
        """
        at = self.frequencies if dispersion_at is None else np.full_like(self.frequencies, dispersion_at)
        outer = outer + 0.5 * self.width_change
        ee, extension = radial_stub_line(at, self.height, self.er, sector, inner, outer, self.t)
        x = radial_stub_reactance(self.frequencies, self.height, ee, sector, inner, outer + extension)
        return series(1j * x)

    def _section(self, impedance: FloatArray, ee: FloatArray, width: float) -> LineSection:
        """Return a line of an impedance [ohm] and an effective permittivity (B,) [-], with its losses."""
        beta = 2.0 * math.pi / C0 * self.frequencies * np.sqrt(ee)
        if self.lossless:
            return LineSection(impedance, beta)
        alpha = hammerstad_jensen_1980_conductor_attenuation(
            self.frequencies, impedance, width + self.width_change, self.conductivity, self.roughness
        )
        alpha = alpha + dielectric_attenuation(self.frequencies, self.er, ee, self.loss_tangent)
        return LineSection(impedance, beta - 1j * alpha)


def medium_of(circuit: Circuit, frequencies: FloatArray, lossless: bool = False) -> Medium:
    """Return the medium of a circuit at frequencies (B,) [Hz]."""
    substrate = circuit.file.substrate
    return Medium(
        frequencies=frequencies,
        er=substrate.relative_permittivity,
        loss_tangent=substrate.loss_tangent,
        height=substrate.height,
        thickness=substrate.copper_thickness,
        conductivity=substrate.conductivity,
        roughness=substrate.copper_roughness,
        plating=circuit.rules.vias.plating or 0.0,
        lossless=lossless,
    )
