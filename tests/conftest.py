"""What holds for every test: one thread of BLAS a process, and which cases of the long tables are tried.

Of a test with many cases a run of the whole suite tries one in ONE_IN, others of every test; POLEBOOK_WHOLE=1 tries all
of them, and so does a run of files that are named. What stands in EVERY is tried in full always.
"""

import gc
import os
from collections import defaultdict
from zlib import crc32

import pytest

WHOLE = bool(os.environ.get("POLEBOOK_WHOLE"))
ONE_IN, LEAST = 5, 5  # a table with fewer cases is short
EVERY = ("tests/published/", "tests/golden/", "tests/tui/test_draw_goldens", "tests/test_readme", "tests/test_trust",
         "tests/terminal/test_kept", "tests/terminal/test_losses", "tests/terminal/test_jobs", "tests/cli/test_main")

# before numpy comes in, as `polebook` does it: of small matrices several threads wait on each other
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")


def pytest_collection_modifyitems(config, items):
    if WHOLE or any(".py" in word for word in config.args):
        return
    tables = defaultdict(list)
    for item in items:
        if hasattr(item, "callspec") and not item.nodeid.startswith(EVERY):
            tables[item.nodeid.partition("[")[0]].append(item)
    left = set()
    for name, cases in tables.items():
        if len(cases) >= LEAST:
            begun = crc32(name.encode()) % ONE_IN
            left |= {id(item) for number, item in enumerate(cases) if number % ONE_IN != begun}
    if left:
        config.hook.pytest_deselected(items=[item for item in items if id(item) in left])
        items[:] = [item for item in items if id(item) not in left]


@pytest.hookimpl(trylast=True)
def pytest_collection_finish():
    gc.freeze()  # thousands of tests, which stay to the end: not looked through at each collection
