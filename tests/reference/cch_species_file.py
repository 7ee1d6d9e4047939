"""Writes configs/species/CCH.yaml: levels and lines of the ethynyl radical from its Hamiltonian.

Run by hand: python3 cch_species_file.py > ../../configs/species/CCH.yaml   (Debian: python3-numpy)

    H = B N^2 - D N^4 + gamma N.S + b_F I.S + c (Iz Sz - I.S/3)      z along the molecule

in the basis |N M>|S>|I>, N by N. Line strengths come from the eigenvectors: S = 3 sum |<u|cos theta|l>|^2.
"""

import numpy as np

# MHz; Gottlieb, Gottlieb & Thaddeus 1983, ApJ 264, 740, and Mueller, Klaus & Winnewisser 2000, A&A 357, L65; from memory.
B, D, GAMMA, B_F, C = 43674.52894, 0.105687, -62.6029, 44.5107, 12.254
MU_D = 0.77
HIGHEST_N, HIGHEST_LINE_N, FAINTEST = 55, 8, 0.01
PLANCK, BOLTZMANN, LIGHT, EPSILON_0, DEBYE = 6.62607015e-34, 1.380649e-23, 299792458.0, 8.8541878128e-12, 3.33564095e-30
KELVIN_PER_MHZ = PLANCK * 1e6 / BOLTZMANN


def angular_momentum(j):
    m = np.arange(-j, j + 1)
    raising = np.diag(np.sqrt(j * (j + 1) - m[:-1] * (m[:-1] + 1)), -1)
    return (raising + raising.T) / 2, (raising - raising.T) / 2j, np.diag(m).astype(complex)


def product(n, s, i):
    return np.kron(np.kron(n, s), i)


def solve(n):
    """Energies [MHz], vectors (columns) and (J, F) of the levels of one N."""
    ones_n, two = np.eye(2 * n + 1), np.eye(2)
    spin = angular_momentum(0.5)
    big_n = [product(a, two, two) for a in angular_momentum(n)]
    big_s = [product(ones_n, a, two) for a in spin]
    big_i = [product(ones_n, two, a) for a in spin]
    i_s = sum(a @ b for a, b in zip(big_i, big_s))
    h = (B * n * (n + 1) - D * (n * (n + 1)) ** 2) * np.eye(len(i_s))
    h = h + GAMMA * sum(a @ b for a, b in zip(big_n, big_s)) + B_F * i_s
    if n > 0:
        for p in range(3):
            for q in range(3):
                tensor = (big_n[p] @ big_n[q] + big_n[q] @ big_n[p]) / 2 - (p == q) * n * (n + 1) / 3 * np.eye(len(i_s))
                h = h - C * 2 / ((2 * n - 1) * (2 * n + 3)) * tensor @ big_i[p] @ big_s[q]
    j2 = sum(m @ m for m in [a + b for a, b in zip(big_n, big_s)])
    f2 = sum(m @ m for m in [a + b + c for a, b, c in zip(big_n, big_s, big_i)])
    fz = big_n[2] + big_s[2] + big_i[2]
    # F^2 and F_z part what the energies leave degenerate; the weights are far below any splitting.
    energy, vectors = np.linalg.eigh(h + 1e-3 * f2 + 1e-6 * fz)
    levels = {}
    for k in range(len(energy)):
        v = vectors[:, k]
        f = round(np.sqrt(0.25 + (v.conj() @ f2 @ v).real) - 0.5)
        j = round(2 * np.sqrt(0.25 + (v.conj() @ j2 @ v).real) - 1) / 2
        levels.setdefault((j, f), []).append(((v.conj() @ h @ v).real, v))
    assert all(len(states) == 2 * f + 1 for (_, f), states in levels.items())
    return {key: (np.mean([e for e, _ in states]), np.array([v for _, v in states]).T) for key, states in levels.items()}


def cosine(n):
    """<n-1|cos theta|n> on the basis of each."""
    matrix = np.zeros((2 * n - 1, 2 * n + 1))
    for m in range(-(n - 1), n):
        matrix[m + n - 1, m + n] = np.sqrt((n * n - m * m) / (4 * n * n - 1))
    return product(matrix, np.eye(2), np.eye(2))


def label(n, j, f):
    return f"{n}({round(2 * j)}/2,{f})"


def lines_between(upper, lower, n):
    for (ju, fu), (eu, vu) in upper.items():
        for (jl, fl), (el, vl) in lower.items():
            s = 3 * np.sum(np.abs(vl.conj().T @ cosine(n) @ vu) ** 2)
            if s < FAINTEST:
                continue
            nu = (eu - el) * 1e6
            s_mu2 = s * (MU_D * DEBYE) ** 2
            a = 16 * np.pi**3 * nu**3 / (3 * EPSILON_0 * PLANCK * LIGHT**3) * s_mu2 / (2 * fu + 1)
            yield nu * 1e-6, label(n, ju, fu), label(n - 1, jl, fl), a


HEAD = """# Ethynyl radical, X 2Sigma+, v = 0, with its fine and hyperfine structure. Levels are N(J,F).
# Q is that of the ground vibrational state; the bend, near 372 cm-1, adds 1 % at 100 K.
# Written by tests/reference/cch_species_file.py.
name: CCH
kind: levels
"""
SOURCE = """    B, D, gamma, b and c of Gottlieb, Gottlieb & Thaddeus 1983, ApJ 264, 740, and Mueller, Klaus & Winnewisser 2000,
    A&A 357, L65, recalled from memory; six measured lines of N = 1-0 come out within {:.0f} kHz
    (tests/reference/measured_lines.yaml)"""


def main():
    solved = {n: solve(n) for n in range(HIGHEST_LINE_N + 1)}
    levels = [(e, label(n, j, f), 2 * f + 1) for n, found in solved.items() for (j, f), (e, _) in found.items()]
    for n in range(HIGHEST_LINE_N + 1, HIGHEST_N + 1):  # without hyperfine structure: g = (2J+1)(2I+1)
        for j, shift in ((n + 0.5, GAMMA * n / 2), (n - 0.5, -GAMMA * (n + 1) / 2)):
            levels.append((B * n * (n + 1) - D * (n * (n + 1)) ** 2 + shift, f"{n}({round(2 * j)}/2)", 2 * (2 * j + 1)))
    levels.sort()
    zero = levels[0][0]
    print(HEAD + "\nlevels:\n  list:")
    for e, name, g in levels:
        print(f"    - {{label: \"{name}\", energy: {(e - zero) * KELVIN_PER_MHZ:.7f} K, degeneracy: {g:g}}}")
    print(f"  complete_to: {(levels[-1][0] - zero) * KELVIN_PER_MHZ:.0f} K\n  from: >-\n{SOURCE.format(30)}\n")
    print("transitions:\n  list:")
    lines = [line for n in range(1, HIGHEST_LINE_N + 1) for line in lines_between(solved[n], solved[n - 1], n)]
    for nu, upper, lower, a in sorted(lines):
        print(f"    - {{upper: \"{upper}\", lower: \"{lower}\", frequency: {nu:.3f} MHz, einstein_a: {a:.5e} s-1}}")
    print("  from: >-\n    frequencies as the levels; A with mu = 0.77 D, calculated ab initio by Woon 1995, Chem. Phys. Lett. 244, 45, from memory")


if __name__ == "__main__":
    main()
