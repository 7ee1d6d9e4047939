"""Levels and lines of an asymmetric rotor with numpy.linalg.eigh, side by side with the compiled program.

    python3 asymmetric_rotor_benchmark.py PROGRAM [J]

PROGRAM is the built asymmetric_rotor_benchmark. Both run on one core, one after the other; processor time, best of
three. Two ways of doing it with numpy are timed. `full` diagonalises the matrix of each J as it stands, on |J,K>, and
takes for lines what comes out with S above 1e-9; where pairs of levels coincide to the last bit it mixes them, and finds
more lines than there are. `blocks` splits the matrix into Wang blocks first, as the program does, and finds the same
lines as the program. Neither puts labels on levels.
"""
import json
import os
import subprocess
import sys
import time

os.sched_setaffinity(0, {min(os.sched_getaffinity(0))})
for variable in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"):
    os.environ[variable] = "1"
import numpy as np

A, B, C = 90e9, 50e9, 30e9
PER_HZ3 = 16 * np.pi**3 / (3 * 8.8541878128e-12 * 6.62607015e-34 * 299792458.0**3)
DEBYE = 1e-21 / 299792458.0


def finish(lines):
    """Frequency, S mu^2 and A of all lines, by rising frequency."""
    upper, lower, g_if_first, g_if_second, s = (np.concatenate(column) for column in zip(*lines))
    frequency = upper - lower
    g = np.where(frequency > 0, g_if_first, g_if_second)
    frequency = np.abs(frequency)
    s_mu2 = s * DEBYE**2
    a = PER_HZ3 * frequency**3 * s_mu2 / g
    order = np.argsort(frequency)
    return frequency[order], s_mu2[order], a[order]


def clebsch_gordan(j, k, q, to):
    """<j k 1 q|to k+q> for arrays of k."""
    if to == j + 1:
        if q == 0:
            return np.sqrt((j - k + 1) * (j + k + 1) / ((2 * j + 1) * (j + 1)))
        return np.sqrt((j + q * k + 1) * (j + q * k + 2) / ((2 * j + 1) * (2 * j + 2)))
    if q == 0:
        return k / np.sqrt(j * (j + 1))
    return -q * np.sqrt((j + q * k + 1) * (j - q * k) / (2 * j * (j + 1)))


def cosine(j, to, axis):
    """Direction cosine as a matrix, rows K' of `to`, columns K of j, times sqrt(2j+1)."""
    matrix = np.zeros((2 * to + 1, 2 * j + 1), dtype=complex)
    k = np.arange(-j, j + 1)
    for q, part in ({0: 1.0} if axis == "z" else {q: -q / np.sqrt(2) if axis == "x" else -1j / np.sqrt(2) for q in (1, -1)}).items():
        inside = np.abs(k + q) <= to
        matrix[k[inside] + q + to, k[inside] + j] = part * clebsch_gordan(j, k[inside], q, to)
    return np.sqrt(2 * j + 1) * matrix


def hamiltonian(j):
    k = np.arange(-j, j + 1.0)
    x = j * (j + 1)
    matrix = np.diag(0.5 * (B + C) * x + (A - 0.5 * (B + C)) * k**2)
    if j > 0:
        low = k[:-2]
        step = 0.25 * (B - C) * np.sqrt((x - low * (low + 1)) * (x - (low + 1) * (low + 2)))
        matrix += np.diag(step, 2) + np.diag(step, -2)
    return matrix


def full(highest_j):
    levels, lines, before = [], [], None
    for j in range(highest_j + 1):
        energy, vectors = np.linalg.eigh(hamiltonian(j))
        levels.append(energy)
        for from_j, state in ((j - 1, before), (j, (energy, vectors))):
            if state is None or j == 0:
                continue
            from_energy, from_vectors = state
            for axis in "xyz":
                s = np.abs(vectors.T @ cosine(from_j, j, axis) @ from_vectors) ** 2
                row, column = np.nonzero(np.tril(s > 1e-9) if from_j == j else s > 1e-9)
                ones = np.ones(row.size)
                lines.append((energy[row], from_energy[column], (2 * j + 1) * ones, (2 * from_j + 1) * ones, s[row, column]))
        before = (energy, vectors)
    return np.concatenate(levels), finish(lines)


def wang_states(j):
    """Four matrices whose columns are the Wang states on |J,K>, by (odd, sign)."""
    states = {}
    for odd in (0, 1):
        for sign in (1, -1):
            ks = np.arange(odd if odd or sign > 0 else 2, j + 1, 2)
            matrix = np.zeros((2 * j + 1, ks.size))
            column = np.arange(ks.size)
            matrix[j + ks, column] = np.where(ks == 0, 1.0, np.sqrt(0.5))
            matrix[j - ks, column] = np.where(ks == 0, 1.0, sign * np.sqrt(0.5))
            states[odd, sign] = matrix
    return states


def blocks(highest_j):
    levels, lines, before = [], [], None
    for j in range(highest_j + 1):
        h = hamiltonian(j)
        here = {}
        for name, basis in wang_states(j).items():
            if basis.shape[1]:
                energy, vectors = np.linalg.eigh(basis.T @ h @ basis)
                here[name] = energy, basis @ vectors
                levels.append(energy)
        for from_j, states in ((j - 1, before), (j, here)):
            if states is None or j == 0:
                continue
            for axis in "xyz":
                phi = cosine(from_j, j, axis)
                phi = phi.imag if axis == "y" else phi.real
                for (odd, sign), (from_energy, from_vectors) in states.items():
                    keeps = (axis == "x") == (from_j == j)
                    name = (odd ^ (axis != "z"), sign if keeps else -sign)
                    if name not in here or (from_j == j and name < (odd, sign)):
                        continue
                    energy, vectors = here[name]
                    s = (vectors.T @ phi @ from_vectors) ** 2
                    row, column = np.nonzero(s > 1e-9)
                    ones = np.ones(row.size)
                    lines.append((energy[row], from_energy[column], (2 * j + 1) * ones, (2 * from_j + 1) * ones, s[row, column]))
        before = here
    return np.concatenate(levels), finish(lines)


def best_of_three(function, *arguments):
    times = []
    for _ in range(3):
        start = time.process_time()
        result = function(*arguments)
        times.append(time.process_time() - start)
    return min(times), result


def program_ms(program, highest_j):
    report = subprocess.run([program, "--benchmark_format=json", f"--benchmark_filter=levels_and_lines_above_rounding/{highest_j}$"],
                            check=True, capture_output=True, text=True)
    figures = json.loads(report.stdout)["benchmarks"][0]
    return figures["cpu_time"], int(figures["lines"])


if __name__ == "__main__":
    highest_j = int(sys.argv[2]) if len(sys.argv) > 2 else 60
    own_ms, own_lines = program_ms(sys.argv[1], highest_j)
    print(f"J = {highest_j}, one core; the program: {own_ms:.1f} ms, {own_lines} lines with S >= 1e-9")
    for function in (full, blocks):
        seconds, (levels, (frequency, s_mu2, a)) = best_of_three(function, highest_j)
        print(f"numpy, {function.__name__}: {1e3 * seconds:.0f} ms, {1e3 * seconds / own_ms:.1f} times as long; "
              f"{levels.size} levels, {frequency.size} lines with S > 1e-9, sum of S {s_mu2.sum() / DEBYE**2:.6f}")
