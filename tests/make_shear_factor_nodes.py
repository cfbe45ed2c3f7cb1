"""Make the numbers in pulsekit/exact/_shear_factor_fit.py: run `python tests/make_shear_factor_nodes.py`.

T - 4 = z/(6 + z/(8 + z/(10 + ...))), z = zeta^2 (continued fraction of a ratio of Bessel functions, DLMF
10.33.1), is a Stieltjes function of z. Its 2N-th convergent is a Gauss quadrature with N nodes and N
weights, all positive, so that nothing cancels on the imaginary axis z = i alpha^2.
"""

from __future__ import annotations

import mpmath as mp

ORDERS = (5, 10, 16)


def gauss_nodes(order: int) -> list[tuple[mp.mpf, mp.mpf]]:
    """Return pairs (t, w) with T - 4 = sum w z/(1 + t z), from the Jacobi matrix of the fraction, 60 digits."""
    with mp.workdps(60):
        steps = [mp.mpf(1) / ((2 * k) * (2 * k + 2)) for k in range(3, 3 + 2 * order)]
        jacobi = mp.zeros(order)
        for k in range(order):
            jacobi[k, k] = steps[0] if k == 0 else steps[2 * k - 1] + steps[2 * k]
            if k + 1 < order:
                jacobi[k, k + 1] = jacobi[k + 1, k] = mp.sqrt(steps[2 * k] * steps[2 * k + 1])
        values, vectors = mp.eigsy(jacobi)
        return [(values[i], vectors[0, i] ** 2 / 6) for i in range(order)]


def main() -> None:
    """Print the table as Python source."""
    print("NODES = {")
    for order in ORDERS:
        print(f"    {order}: (")
        for node, weight in gauss_nodes(order):
            print(f"        ({mp.nstr(node, 20)}, {mp.nstr(weight, 20)}),")
        print("    ),")
    print("}")


if __name__ == "__main__":
    main()
