"""Two-ports by their chain parameters, for all frequencies at once; finite for every ideal element.

A two-port with voltage V1 and current I1 entering at its near end, V2 and I2 leaving at its far end obeys
``V1 = a V2 + b I2`` and ``I1 = c V2 + d I2``. Lines of any length, elements of zero impedance and shorted
stubs all have finite chain parameters, which their admittances have not. All two-ports here are
reciprocal: ``a d - b c = 1``.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

__all__ = ["Chain", "ComplexArray", "FloatArray", "cascade", "line", "reverse", "series", "shunt"]

ComplexArray = npt.NDArray[np.complex128]
FloatArray = npt.NDArray[np.float64]


class Chain(NamedTuple):
    """Chain parameters of a reciprocal two-port, each of shape (B,) or a number of that shape's kind.

    Attributes:
        a: Voltage ratio with the far end open [-].
        b: Transfer impedance with the far end shorted [ohm].
        c: Transfer admittance with the far end open [S].
        d: Current ratio with the far end shorted [-].
    """

    a: ComplexArray
    b: ComplexArray
    c: ComplexArray
    d: ComplexArray


def series(impedance: npt.ArrayLike) -> Chain:
    """Return a series impedance [ohm], zero allowed."""
    z = np.asarray(impedance, dtype=np.complex128)
    one, zero = np.ones_like(z), np.zeros_like(z)
    return Chain(one, z, zero, one)


def shunt(admittance: npt.ArrayLike) -> Chain:
    """Return a shunt admittance [S]."""
    y = np.asarray(admittance, dtype=np.complex128)
    one, zero = np.ones_like(y), np.zeros_like(y)
    return Chain(one, zero, y, one)


def line(impedance: npt.ArrayLike, angle: npt.ArrayLike) -> Chain:
    """Return a uniform line.

    Args:
        impedance: Characteristic impedance [ohm], real or complex.
        angle: Electrical length [rad]; complex with a negative imaginary part where there is loss, and
            negative where a reference plane is moved back.

    >>> import math
    >>> half_wave = line(50.0, math.pi)
    >>> round(float(half_wave.a.real), 12), bool(abs(half_wave.b) < 1e-12)
    (-1.0, True)
    """
    z = np.asarray(impedance)
    theta = np.asarray(angle)
    cosine, sine = _circle(theta)
    a = np.asarray(cosine, dtype=np.complex128)
    if z.ndim > theta.ndim:
        a = np.broadcast_to(a, np.broadcast_shapes(z.shape, theta.shape))
    turned = 1j * sine
    return Chain(a, z * turned, turned / z, a)


def _circle(theta: ComplexArray | FloatArray) -> tuple[ComplexArray | FloatArray, ComplexArray | FloatArray]:
    """Return cosine and sine; of complex angles by real functions, which is quicker."""
    if not np.iscomplexobj(theta):
        return np.cos(theta), np.sin(theta)
    x, y = theta.real, theta.imag
    cosine, sine = np.cos(x), np.sin(x)
    even, odd = np.cosh(y), np.sinh(y)
    both = np.empty((2, *theta.shape), dtype=np.complex128)
    both[0].real, both[0].imag = cosine * even, -sine * odd
    both[1].real, both[1].imag = sine * even, cosine * odd
    return both[0], both[1]


def cascade(first: Chain, *others: Chain) -> Chain:
    """Return the two-port of several, near end first.

    >>> both = cascade(series(3.0), series(4.0))
    >>> complex(both.b)
    (7+0j)
    """
    a, b, c, d = first
    for other in others:
        a, b, c, d = (
            a * other.a + b * other.c,
            a * other.b + b * other.d,
            c * other.a + d * other.c,
            c * other.b + d * other.d,
        )
    return Chain(a, b, c, d)


def reverse(chain: Chain) -> Chain:
    """Return the two-port seen from its far end."""
    return Chain(chain.d, chain.b, chain.c, chain.a)
