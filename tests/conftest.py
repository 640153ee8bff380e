"""Settings that must stand before numpy is loaded."""

import os

# The matrices here are small: threads of the linear algebra would only wait for each other, and for
# the processes that a reduction starts.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
