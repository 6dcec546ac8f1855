"""Partial waves of a sphere: the coefficients a_n, b_n of the Mie series and what each order absorbs.

Time factor exp(−iωt), so absorption is a positive imaginary part of the index. Source: Bohren & Huffman,
Absorption and Scattering of Light by Small Particles (1983), ch. 4, eqs. 4.56–4.57.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.optics.recurrences import Ratios, order_groups, psi_and_chi, series_length, small_from
from lasescatter.optics.workspace import Workspace

Floats = NDArray[np.float64]

SMALLEST_SIZE_PARAMETER = 1e-6
LARGEST_SIZE_PARAMETER = 2e4
LARGEST_INDEX = 20.0
SMALLEST_CONTRAST = 1e-6

# Up to this k x, and this share of the real part of the index, the recurrence runs at the real part of m x and
# absorption enters by its derivative; what that leaves out is of the order of the squares.
_WEAK_ABSORPTION = 1e-5
_WEAK_SHARE = 1e-7
_TINY_SIZE_PARAMETER = 0.01


class SizeRangeError(ValueError):
    """A particle lies outside what the series is built for; the text names quantity, value and range."""


@dataclass(frozen=True)
class PartialWaves:
    """Orders 1…N of R spheres, N being the series length of the largest. The arrays are those of a workspace."""

    total: NDArray[np.complex128]
    """a_n + b_n, shape (N, R)."""
    difference: NDArray[np.complex128]
    """a_n − b_n."""
    absorbed: Floats
    """Sum of (2n + 1) (Re(a) − |a|² + Re(b) − |b|²) over the orders, free of cancellation, shape (R,)."""

    @property
    def a(self) -> NDArray[np.complex128]:
        """Electric coefficients, (N, R)."""
        return (self.total + self.difference) / 2

    @property
    def b(self) -> NDArray[np.complex128]:
        """Magnetic coefficients, (N, R)."""
        return (self.total - self.difference) / 2


def check_size_parameter(smallest: float, largest: float, whose: str = "") -> None:
    """Refuse size parameters outside the range of the series.

    Raises
    ------
    SizeRangeError
    """
    for value in (smallest, largest):
        if not SMALLEST_SIZE_PARAMETER <= value <= LARGEST_SIZE_PARAMETER:
            raise SizeRangeError(
                f"size parameter 2π r n/λ = {value:.6g}{whose} is outside its range, "
                f"{SMALLEST_SIZE_PARAMETER:g} to {LARGEST_SIZE_PARAMETER:g}"
            )


def check_index(index: complex) -> None:
    """Refuse an index that the series cannot use.

    Raises
    ------
    SizeRangeError
    """
    if not (np.isfinite(index) and index.real > 0 and index.imag >= 0 and abs(index) <= LARGEST_INDEX):
        raise SizeRangeError(
            f"relative refractive index {index:.6g} is outside its range: real part above 0, "
            f"imaginary part at least 0, modulus at most {LARGEST_INDEX:g}"
        )
    if abs(index - 1) < SMALLEST_CONTRAST:
        raise SizeRangeError(
            f"relative refractive index {index:.9g} is that of the medium to {SMALLEST_CONTRAST:g}: nothing scatters"
        )


def partial_waves(
    index: complex, size_parameter: Floats, weight: Floats | None = None, workspace: Workspace | None = None
) -> PartialWaves:
    """Coefficients of spheres of one index.

    Orders are taken in groups; in each only the spheres whose series is that long take part.

    Parameters
    ----------
    index : complex
        Relative to the medium. An infinite value means a perfect conductor.
    size_parameter : (R,) array
        Descending.
    weight : (R,) array, optional
        Coefficients come multiplied by its root, and what is absorbed by itself.
    workspace : Workspace, optional
        Its arrays are used for the result, which the next call with it overwrites.
    """
    x, space = size_parameter, workspace or Workspace()
    root = np.ones(x.size) if weight is None else np.sqrt(weight)
    lengths = series_length(x)
    groups = order_groups(x, lengths)
    psi_chi = psi_and_chi(x, groups, space)
    conductor = bool(np.isinf(index))
    weak = not conductor and (index.imag == 0 or _is_weak(index, float(x[0]), float(x[-1])))
    downward = None if conductor else Ratios((index.real if weak else index) * x, lengths, space)
    orders = int(lengths[0])
    total = space.complex_array("total", orders, x.size)
    difference = space.complex_array("difference", orders, x.size)
    absorbed = np.zeros(x.size)
    inverse = 1 / x
    for low, high, count in reversed(groups):
        n = np.arange(low, high + 1.0)[:, np.newaxis]
        both = psi_chi[low - 1 : high + 1, : 2 * count]
        psi, chi = space.array("psi", high - low + 2, count), space.array("chi", high - low + 2, count)
        np.copyto(psi, both[:, ::2])
        np.copyto(chi, both[:, 1::2])
        over = np.multiply(n, inverse[:count], out=space.array("over", high - low + 1, count))
        algebra = _Algebra(space, over, (root[:count], psi[:-1], psi[1:], chi[:-1], chi[1:]))
        if downward is None:
            a, b = algebra.conductor()
        elif weak and index.imag == 0:
            a, b = algebra.real(index.real, downward.of_orders(low, high, count))
        else:
            inner = downward.of_orders(low, high, count)
            a, b, lost = algebra.weak(index, n, x[:count], inner) if weak else algebra.full(index, inner)
            absorbed[:count] += (2 * n[:, 0] + 1) @ lost
        rows = slice(low - 1, high), slice(0, count)
        total[low - 1 : high, count:] = 0
        difference[low - 1 : high, count:] = 0
        for part, sums, differences in ((0, total.real, difference.real), (1, total.imag, difference.imag)):
            np.add(a[part], b[part], out=sums[rows])
            np.subtract(a[part], b[part], out=differences[rows])
    small = small_from(x)
    if small < x.size:
        # psi_n of small spheres is right up to this order; what comes out beyond it could drown the first ones.
        beyond = int(lengths[small])
        total[beyond:, small:] = 0
        difference[beyond:, small:] = 0
    return PartialWaves(total, difference, absorbed * root)


def _is_weak(index: complex, largest: float, smallest: float) -> bool:
    """Whether absorption may be taken to first order. For tiny spheres what the lowest order absorbs would cancel."""
    faint = index.imag <= _WEAK_SHARE * index.real and index.imag * largest <= _WEAK_ABSORPTION
    return faint and smallest >= _TINY_SIZE_PARAMETER


Parts = tuple[Floats, Floats]
# Root of the weights, psi_{n−1}, psi_n, chi_{n−1}, chi_n.
Outer = tuple[Floats, Floats, Floats, Floats, Floats]


@dataclass(frozen=True)
class _Algebra:
    """Coefficients of one group of orders, (orders, spheres), in arrays of a workspace."""

    space: Workspace
    over: Floats
    """n/x. Overwritten."""
    outer: Outer

    def _array(self, name: str) -> Floats:
        return self.space.array(name, *self.over.shape)

    def conductor(self) -> tuple[Parts, Parts]:
        """The limit of an infinite index."""
        root, _, psi, _, chi = self.outer
        a = self._lossless("a", self.over)
        real, imaginary = self._array("b real"), self._array("b imaginary")
        np.multiply(psi, psi, out=real)
        np.multiply(chi, chi, out=imaginary)
        imaginary += real
        np.divide(root, imaginary, out=imaginary)
        real *= imaginary
        imaginary *= psi
        imaginary *= chi
        return a, (real, imaginary)

    def real(self, m: float, inner: Floats) -> tuple[Parts, Parts]:
        """Without absorption; `inner` is f = psi_{n−1}(mx)/psi_n(mx). Overwrites it."""
        magnetic = np.multiply(inner, m, out=self._array("magnetic"))
        np.multiply(self.over, 1 - 1 / m**2, out=self.over)
        inner *= 1 / m
        inner += self.over
        return self._lossless("a", inner), self._lossless("b", magnetic)

    def weak(self, index: complex, n: Floats, x: Floats, inner: Floats) -> tuple[Parts, Parts, Floats]:
        """Real algebra, to first order in k; `inner` is f at z = Re(m) x. Overwrites it.

        With t = f/m + (n/x)(1 − 1/m²) or m f and df/dz = −1 − f² + 2 n f/z the imaginary parts of t are −s,
        s = k [z (1 + f²) − (2n + 1) f] for the magnetic one. Near a zero of psi_n(z) it is psi_n and psi_{n−1}
        that are taken to first order: f and s are then smaller by 1 + (k x (f − n/z))².
        """
        m, k = index.real, index.imag
        kz = k * m * x
        near_zero = np.multiply(self.over, -1 / m, out=self._array("near zero"))
        near_zero += inner
        near_zero *= k * x
        near_zero *= near_zero
        near_zero += 1
        np.reciprocal(near_zero, out=near_zero)
        s_magnetic = np.multiply(kz, inner, out=self._array("s magnetic"))
        s_magnetic -= k * (2 * n + 1)
        s_magnetic *= inner
        s_magnetic += kz
        s_magnetic *= near_zero
        inner *= near_zero
        magnetic = np.multiply(inner, m, out=self._array("magnetic"))
        electric = inner
        electric *= 1 / m
        s_electric = np.multiply(self.over, -1 / m**2, out=self._array("s electric"))
        s_electric += electric
        s_electric *= 2 * k * m
        s_electric += s_magnetic
        s_electric *= 1 / m**2
        np.multiply(self.over, 1 - 1 / m**2, out=self.over)
        electric += self.over
        return self._both(electric, s_electric, magnetic, s_magnetic)

    def full(self, index: complex, inner: NDArray[np.complex128]) -> tuple[Parts, Parts, Floats]:
        """Complex algebra; `inner` is f at z = m x."""
        product = np.multiply(inner, index, out=self.space.complex_array("product", *inner.shape))
        magnetic, s_magnetic = self._array("magnetic"), self._array("s magnetic")
        np.copyto(magnetic, product.real)
        np.negative(product.imag, out=s_magnetic)
        np.multiply(inner, 1 / index, out=product)
        contrast = 1 - 1 / index**2
        electric = np.multiply(self.over, contrast.real, out=self._array("electric"))
        electric += product.real
        s_electric = np.multiply(self.over, -contrast.imag, out=self._array("s electric"))
        s_electric -= product.imag
        return self._both(electric, s_electric, magnetic, s_magnetic)

    def _both(
        self, electric: Floats, s_electric: Floats, magnetic: Floats, s_magnetic: Floats
    ) -> tuple[Parts, Parts, Floats]:
        """Both coefficients, and what they absorb together."""
        a = self._lossy("a", electric, s_electric)
        b = self._lossy("b", magnetic, s_magnetic)
        s_electric += s_magnetic
        return a, b, s_electric

    def _lossless(self, name: str, t: Floats) -> Parts:
        """(t psi_n − psi_{n−1})/(t xi_n − xi_{n−1}) with xi = psi − i chi and real t: p/(p − iq). Overwrites t."""
        root, psi_before, psi, chi_before, chi = self.outer
        p = np.multiply(t, psi, out=self._array(f"{name} imaginary"))
        p -= psi_before
        q = np.multiply(t, chi, out=t)
        q -= chi_before
        size = np.multiply(p, p, out=self._array(f"{name} real"))
        scale = np.multiply(q, q, out=self._array("u"))
        scale += size
        np.divide(root, scale, out=scale)
        p *= q
        p *= scale
        size *= scale
        return size, p

    def _lossy(self, name: str, t: Floats, s: Floats) -> Parts:
        """The same for t − is; s becomes Re − |·|² of it, and t is overwritten.

        Because psi_{n−1} chi_n − psi_n chi_{n−1} = 1 it is (p² + s + s² psi² + i (pq + s² psi chi))/d with
        d = p² + q² + 2s + s² (psi² + chi²), and s/d is absorbed.
        """
        root, psi_before, psi, chi_before, chi = self.outer
        p = np.multiply(t, psi, out=self._array(f"{name} imaginary"))
        p -= psi_before
        q = np.multiply(t, chi, out=t)
        q -= chi_before
        v = np.multiply(s, psi, out=self._array("v"))
        u = np.multiply(s, chi, out=self._array("u"))
        real = np.multiply(p, p, out=self._array(f"{name} real"))
        p *= q
        q *= q
        real += s
        q += s
        u_v = np.multiply(u, v, out=self._array("uv"))
        p += u_v
        v *= v
        real += v
        u *= u
        q += u
        q += real
        np.divide(root, q, out=q)
        real *= q
        p *= q
        s *= q
        return real, p
