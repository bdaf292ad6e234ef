"""What holds for every test."""

import gc
import os

# before numpy comes in, as `polebook` does it: of small matrices several threads wait on each other
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")


def pytest_collection_finish():
    gc.freeze()  # thousands of tests, which stay to the end: not looked through at each collection
