"""Writes ``eckart_box.yaml``: Eckart factors over the box of what is claimed, by quadrature with 30 digits.

Written apart from the package: textbook form of the transmission probability, other variable, other panels. Every
integral is made on panels and on parts of them until two agree to 1e-10. Takes some minutes.
"""

from itertools import pairwise, product
from pathlib import Path
from random import Random

import mpmath as mp
import yaml
from scipy.constants import N_A, c, h, k

mp.mp.dps = 30
CORNERS = list(product((1.0, 400.0), (1.0, 400.0), (50.0, 3000.0), (100.0, 3000.0)))
INSIDE = 24
AGREEMENT = 1e-10
NAMES = ("barrier_forward_kJ_per_mol", "barrier_reverse_kJ_per_mol", "imaginary_frequency_per_cm", "temperature_K")


def log_factor(forward: float, reverse: float, wavenumber: float, temperature: float, splits: int) -> mp.mpf:
    """Logarithm of the factor; barriers [kJ mol-1], imaginary frequency [cm-1], temperature [K]."""
    unit = mp.mpf(h) * wavenumber * 100 * c / (2 * mp.pi)
    v1, v2 = (mp.mpf(barrier) * 1000 / mp.mpf(N_A) / unit for barrier in (forward, reverse))
    beta = unit / (mp.mpf(k) * temperature)
    length = 2 / (1 / mp.sqrt(v1) + 1 / mp.sqrt(v2))
    constant = mp.cosh(2 * mp.sqrt(mp.mpc(v1 * v2 - mp.pi**2 / 4))).real
    threshold = max(mp.mpf(0), v1 - v2)

    def integrand(root: mp.mpf) -> mp.mpf:  # of the energy above the threshold
        energy = threshold + root**2
        a, b = length * mp.sqrt(energy), length * mp.sqrt(abs(energy - v1 + v2))
        probability = (mp.cosh(a + b) - mp.cosh(a - b)) / (mp.cosh(a + b) + constant)
        return probability * mp.exp(beta * (v1 - energy)) * 2 * root * beta

    depth, far = v1 - threshold, 80 + 70 / beta  # units above the barrier
    below = [depth * mp.mpf(i) / 24 for i in range(25)] + [depth - mp.mpf(2) ** i for i in range(12)]
    above = [depth + mp.mpf(2) ** i for i in range(14)] + [depth + far * mp.mpf(i) / 12 for i in range(1, 13)]
    roots = [mp.sqrt(e) for e in sorted({e for e in below + above if 0 <= e <= depth + far})]
    fine = [lower + (upper - lower) * j / splits for lower, upper in pairwise(roots) for j in range(splits)]
    return mp.log(mp.quad(integrand, [*fine, roots[-1]], method="gauss-legendre", maxdegree=3))


def points() -> list[tuple[float, float, float, float]]:
    random = Random(1932)
    inside = []
    for _ in range(INSIDE):
        barriers = [round(400.0 ** random.random(), 3) for _ in range(2)]
        inside.append((*barriers, round(50 * 60 ** random.random(), 2), round(100 * 30 ** random.random() ** 2, 2)))
    return CORNERS + inside


def converged(point: tuple[float, float, float, float]) -> mp.mpf:
    coarse, fine, splits = mp.inf, log_factor(*point, 1), 2
    while abs(coarse - fine) > AGREEMENT:
        coarse, fine, splits = fine, log_factor(*point, splits), 2 * splits
    return fine


def main() -> None:
    entries = []
    for number, point in enumerate(points(), 1):
        fine = converged(point)
        entries.append(
            {
                "id": f"eckart-box-{number}",
                "value": float(mp.nstr(fine, 13)),
                "inputs": dict(zip(NAMES, point, strict=True)),
            }
        )
        print(number, point, mp.nstr(fine, 13), flush=True)
    header = (
        "# Natural logarithms of Eckart transmission factors, by make_eckart_box.py beside this file (mpmath):\n"
        "# corners of the box 1 to 400 kJ/mol, 50 to 3000 cm-1, 100 to 3000 K, and points inside (seeded).\n"
        "kind: derived\n"
        "quantity: ln of the Eckart transmission factor\n"
        "unit: '1'\n"
        "tolerance: {kind: absolute, size: 1.0e-10, why: agreement of two subdivisions}\n"
        "source: C. Eckart, Phys. Rev. 35, 1303 (1930), in the notation of H. S. Johnston, J. Heicklen (1962)\n"
    )
    text = (
        header
        + "entries:\n"
        + "".join(
            "- " + yaml.safe_dump(entry, default_flow_style=True, sort_keys=False, width=10**4) for entry in entries
        )
    )
    (Path(__file__).parent / "eckart_box.yaml").write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
