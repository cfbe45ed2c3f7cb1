"""The shear factor T(alpha) at speed: sums of positive partial fractions, and a polynomial in 1/zeta.

The numbers in NODES are written by tests/make_shear_factor_nodes.py, which says where they come from; the
tests hold the fit against 40-digit arithmetic.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

__all__ = ["shear_factor_of_square", "shear_factor_slope_of"]

NODES: dict[int, tuple[tuple[float, float], ...]] = {
    5: (
        (0.00035887934122342350113, 0.023860084638528937493),
        (0.0029737877647547098746, 0.02085523866726463185),
        (0.0071410403437148985557, 0.017834250013458090869),
        (0.014111049466249355615, 0.028286600921829331488),
        (0.037915243084057612454, 0.075830492425585674967),
    ),
    10: (
        (0.000035695579976607237488, 0.0075825858364483346146),
        (0.00031316255588802584055, 0.0072878704239473905554),
        (0.00082493244301808876918, 0.0066810699709345190827),
        (0.0014859818600133576984, 0.0057620929147270747804),
        (0.002207108727531410478, 0.0051147907094556752595),
        (0.0030991042214197688, 0.0062306915455523434704),
        (0.0045678706875311472328, 0.0091358834395821355461),
        (0.0074062712918018765336, 0.014812542620985649065),
        (0.014114326256262997941, 0.02822865251252616596),
        (0.037915243346253689166, 0.075830486692507378332),
    ),
    16: (
        (6.6112290512502262417e-6, 0.0032693304079332148466),
        (0.000058857908816406211549, 0.0032156567993819908183),
        (0.00015991674777556934031, 0.003106617976129738048),
        (0.00030288360726303998716, 0.0029380905397172228508),
        (0.00047725334553240824783, 0.0027021779152935342832),
        (0.00066880309107610352451, 0.0023938060710411111236),
        (0.00086320737016011256768, 0.0021076563197997351475),
        (0.0010687415901929172728, 0.002183871146620722842),
        (0.0013299574156086660867, 0.002661133220895035595),
        (0.0016976821973442658283, 0.0033953709550851683407),
        (0.0022425166764115807627, 0.0044850333595073769204),
        (0.0031002453518456492306, 0.006200490703692264216),
        (0.0045678747305239518548, 0.0091357494610479037209),
        (0.0074062712927441328761, 0.014812542585488265752),
        (0.014114326256263001915, 0.028228652512526003829),
        (0.037915243346253689166, 0.075830486692507378332),
    ),
}

# (largest alpha, order of the sum): the truncation error stays below 1e-16 there.
_BELOW = ((2.5, 5), (10.0, 10), (26.0, 16))
# (smallest alpha, terms of the expansion in 1/zeta): likewise; below 26 exp(-2 Re zeta) is not negligible.
_ABOVE = ((26.0, 18), (80.0, 10), (1000.0, 5))
_CHUNK = 8192
_FEW = 512
_ARRAYS = {order: (np.array(rows)[:, 0], np.array(rows)[:, 1]) for order, rows in NODES.items()}
_ROOT_HALF = float(np.sqrt(0.5))


def _expansion() -> tuple[float, ...]:
    """Coefficients a_k of T = sum a_k zeta^(1-k), from zeta T' = zeta^2 + 4 T - T^2."""
    a = [1.0]
    for k in range(1, 19):
        known = sum(a[i] * a[k - i] for i in range(1, k))
        a.append(((k + 2.0) * a[k - 1] - known) / 2.0)
    return tuple(a)


_A = _expansion()


def _fractions(square: NDArray[np.float64], order: int) -> NDArray[np.complex128]:
    """Sum of w z/(1 + t z) for z = i square, in real arithmetic: all terms of both parts are positive."""
    real = np.zeros_like(square)
    imaginary = np.zeros_like(square)
    ts = np.empty_like(square)
    term = np.empty_like(square)
    for t, w in NODES[order]:
        np.multiply(square, t, out=ts)
        np.multiply(ts, ts, out=term)
        term += 1.0
        np.divide(w, term, out=term)
        imaginary += term
        term *= ts
        real += term
    out = np.empty(square.shape, dtype=complex)
    np.multiply(real, square, out=real)
    np.add(real, 4.0, out=out.real)
    np.multiply(imaginary, square, out=out.imag)
    return out


def _fractions_at_once(square: NDArray[np.float64], order: int) -> NDArray[np.complex128]:
    """The same sum for few numbers, where each call into NumPy costs more than its arithmetic."""
    nodes, weights = _ARRAYS[order]
    ts = square[:, None] * nodes
    term = weights / (1.0 + ts * ts)
    return np.asarray(4.0 + square * (term * ts).sum(axis=1) + 1j * (square * term.sum(axis=1)))


def _far(alpha: NDArray[np.float64], terms: int) -> NDArray[np.complex128]:
    """Expansion in 1/zeta; 1/zeta = (1 - i)/(sqrt(2) alpha)."""
    u = _ROOT_HALF / alpha
    inverse = np.empty(alpha.shape, dtype=complex)
    inverse.real = u
    np.negative(u, out=inverse.imag)
    total = np.full(alpha.shape, complex(_A[terms]))
    for k in range(terms - 1, 0, -1):
        total *= inverse
        total += _A[k]
    total.real += _ROOT_HALF * alpha
    total.imag += _ROOT_HALF * alpha
    return total


def shear_factor_of_square(alpha: NDArray[np.float64]) -> NDArray[np.complex128]:
    """T(alpha) for checked Womersley numbers of any shape."""
    flat = np.ascontiguousarray(alpha, dtype=float).reshape(-1)
    out = np.empty(flat.size, dtype=complex)
    # Pieces that stay in the cache: the arithmetic is cheap enough that memory would be the cost.
    for start in range(0, flat.size, _CHUNK):
        piece = slice(start, start + _CHUNK)
        _fill(flat[piece], out[piece])
    return out.reshape(alpha.shape)


def _fill(alpha: NDArray[np.float64], out: NDArray[np.complex128]) -> None:
    lower = -1.0
    for upper, order in _BELOW:
        _put(alpha, out, (alpha > lower) & (alpha <= upper), order, True)
        lower = upper
    for index, (start, terms) in enumerate(_ABOVE):
        end = _ABOVE[index + 1][0] if index + 1 < len(_ABOVE) else np.inf
        _put(alpha, out, (alpha > start) & (alpha <= end), terms, False)


def _put(alpha: NDArray[np.float64], out: NDArray[np.complex128], where: NDArray[np.bool_], size: int, near: bool) -> None:
    places = np.flatnonzero(where)
    if places.size == 0:
        return
    picked = alpha if places.size == alpha.size else alpha[places]
    few = picked.size <= _FEW
    values = (_fractions_at_once if few else _fractions)(picked * picked, size) if near else _far(picked, size)
    if places.size == alpha.size:
        out[:] = values
    else:
        out[places] = values


def shear_factor_slope_of(alpha: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Derivative alpha dT/dalpha = 2 z dT/dz for checked Womersley numbers of any shape."""
    flat = np.ascontiguousarray(alpha, dtype=float).reshape(-1)
    out = np.empty(flat.size, dtype=complex)
    near = flat <= _BELOW[-1][0]
    z = 1j * flat[near] ** 2
    total = np.zeros_like(z)
    for t, w in NODES[_BELOW[-1][1]]:
        total += w / (1.0 + t * z) ** 2
    out[near] = 2.0 * z * total
    zeta = np.exp(0.25j * np.pi) * flat[~near]
    inverse = 1.0 / zeta
    tail = np.zeros_like(zeta)
    for k in range(len(_A) - 1, 1, -1):
        tail = tail * inverse + (1 - k) * _A[k]
    out[~near] = zeta * (1.0 + tail * inverse * inverse)
    return out.reshape(alpha.shape)
