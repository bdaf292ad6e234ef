"""Remakes the goldens of this folder from the demo chains: python -m tests.golden"""

from tests.golden.making import CHAINS, GOLDEN, VERDICTS, texts, verdicts

(GOLDEN / VERDICTS).write_text(verdicts(), encoding="utf-8")
print(VERDICTS)
for chain in CHAINS:
    for name, text in texts(chain).items():
        (GOLDEN / name).write_text(text, encoding="utf-8")
        print(name)
