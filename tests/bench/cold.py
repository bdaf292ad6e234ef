"""Cold start of `polebook audit` against a bare import of numpy: `python -m tests.bench.cold`.

15 alternating runs of each, medians and their ratio, and whether scipy, textual or rich came in.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from statistics import median
from time import perf_counter

ROOT = Path(__file__).resolve().parents[2]
AUDIT = [sys.executable, "-m", "polebook", "audit", str(ROOT / "chains" / "six-stage.toml")]
NUMPY = [sys.executable, "-c", "import numpy"]
LOADED = """
import sys
from polebook.cli.main import main
main(["audit", sys.argv[1]])
print([name for name in ("scipy", "textual", "rich") if name in sys.modules], file=sys.stderr)
"""


def timed(command: list[str]) -> float:
    start = perf_counter()
    done = subprocess.run(command, capture_output=True, check=False)
    if done.returncode not in (0, 1):
        raise SystemExit(done.stderr.decode())
    return 1e3 * (perf_counter() - start)


def main() -> None:
    timed(AUDIT), timed(NUMPY)
    audit, numpy = [], []
    for _ in range(15):
        audit.append(timed(AUDIT))
        numpy.append(timed(NUMPY))
    ours, bare = median(audit), median(numpy)
    print(f"audit {ours:.0f} ms, import numpy {bare:.0f} ms, ratio {ours / bare:.2f}")
    loaded = subprocess.run([sys.executable, "-c", LOADED, AUDIT[-1]], capture_output=True, check=False, text=True)
    print("loaded beside it:", loaded.stderr.strip().splitlines()[-1])


if __name__ == "__main__":
    main()
