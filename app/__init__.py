"""Lodestead's desktop: the screen over the engine."""

import os

# The products of a map are small: a second thread of the matrix library only spins and
# takes the processor from the field and the window. To be set before numpy is loaded.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
