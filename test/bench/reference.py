"""Times NumPy and SciPy for kernels.js: one JSON request a line on standard input, one answer a line."""

import json
import sys
import time

import numpy as np

try:
    import scipy.sparse as sparse
except ImportError:
    sparse = None


def hermitian(rng, shape, real=False):
    a = rng.standard_normal(shape) + (0 if real else 1j * rng.standard_normal(shape))
    return a + a.swapaxes(-1, -2).conj()


def distinct(rng, n, kinds):
    q, _ = np.linalg.qr(hermitian(rng, (n, n)))
    a = (q * (np.arange(n) % kinds)) @ q.conj().T
    return (a + a.conj().T) / 2


def case(kind, n, count):
    rng = np.random.default_rng(1)
    if kind == "sparse":
        if sparse is None:
            return None
        index = rng.integers(0, n, (2, n * count))
        rows = np.repeat(np.arange(n), count)
        a = sparse.csr_matrix((rng.standard_normal(n * count), (rows, index[0])), shape=(n, n))
        b = sparse.csr_matrix((rng.standard_normal(n * count), (rows, index[1])), shape=(n, n))
        return lambda: a @ b - b @ a
    if kind == "product":
        a, b = hermitian(rng, (n, n)), hermitian(rng, (n, n))
        return lambda: a @ b
    if kind == "distinct":
        a = distinct(rng, n, count)
    elif kind == "batch":
        a = hermitian(rng, (count, n, n))
    else:
        a = hermitian(rng, (n, n), kind == "real")
    return lambda: np.linalg.eigh(a)


run = None
print(json.dumps({"numpy": np.__version__}), flush=True)
for line in sys.stdin:
    request = json.loads(line)
    if "kind" in request:
        run = case(request["kind"], request["n"], request["count"])
        print(json.dumps({"ready": run is not None}), flush=True)
    else:
        begun = time.perf_counter()
        run()
        print(json.dumps({"ms": 1000 * (time.perf_counter() - begun)}), flush=True)
