# How fast is SuperLU, as SciPy calls it, on the same matrix?   superlu.py FILE REPEATS   (file format: peers.c)
import json
import resource
import sys
import time

import numpy
import scipy.sparse
import scipy.sparse.linalg

with open(sys.argv[1], "rb") as f:
    n = int(numpy.fromfile(f, numpy.int32, 2)[0])
    count = int(numpy.fromfile(f, numpy.int64, 1)[0])
    rows = numpy.fromfile(f, numpy.int32, count)
    columns = numpy.fromfile(f, numpy.int32, count)
    values = numpy.fromfile(f, numpy.complex128, count)
lower = scipy.sparse.coo_matrix((values, (rows, columns)), (n, n)).tocsc()
a = (lower + scipy.sparse.tril(lower, -1).T).tocsc()
for _ in range(int(sys.argv[2])):
    cpu, wall = time.process_time(), time.perf_counter()
    lu = scipy.sparse.linalg.splu(a, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True})
    print(json.dumps({
        "what": "superlu", "factor": time.process_time() - cpu, "wall": time.perf_counter() - wall,
        "entries": int(lu.L.nnz + lu.U.nnz), "peak": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss,
    }), flush=True)
