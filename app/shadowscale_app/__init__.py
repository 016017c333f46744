"""The desktop, and the one door to the commands."""

import os

# Before numpy loads: the engine's matrices are small, and BLAS threads that wait for work of their
# kind take a tenth of a solve's processor time, which a sampler's or a fit's own threads could use.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
