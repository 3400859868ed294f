"""Least seconds of three QR factorisations (R alone) of a 10^6 x 50 matrix in NumPy, and its BLAS.

Prints one line: the seconds, then the name. Ends with status 1 where NumPy runs on another BLAS than
OpenBLAS: the reference BLAS is no peer to be measured against.
"""

import sys
import time

import numpy


def runs_on_openblas():
    """Whether this process has loaded OpenBLAS; Debian keeps it as libblas.so.3 in a folder so named."""
    with open("/proc/self/maps", encoding="ascii", errors="replace") as maps:
        return any("openblas" in line.lower() for line in maps)


rows, columns = 1_000_000, 50
matrix = numpy.random.default_rng(20260101).standard_normal((rows, columns))
numpy.linalg.qr(matrix[:1000], mode="r")  # loads the library

if not runs_on_openblas():
    sys.exit("NumPy does not run on OpenBLAS")

best = float("inf")
for _ in range(3):
    start = time.perf_counter()
    numpy.linalg.qr(matrix, mode="r")
    best = min(best, time.perf_counter() - start)
print(f"{best:.6f} NumPy {numpy.__version__}, OpenBLAS, one thread")
