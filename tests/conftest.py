"""One thread in LAPACK, as the command line has it: set before numpy is imported."""

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
