"""One thread for linear algebra: the matrices are small, and parallel workers would only disturb each other."""

import os

for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")
