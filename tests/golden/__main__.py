"""Remakes the goldens of this folder from the demo chains: python -m tests.golden"""

from tests.golden import screens
from tests.golden.making import CHAINS, GOLDEN, REVIEW, VERDICTS, review, texts, verdicts

(GOLDEN / VERDICTS).write_text(verdicts(), encoding="utf-8")
print(VERDICTS)
(GOLDEN / REVIEW).write_text(review(), encoding="utf-8")
print(REVIEW)
for chain in CHAINS:
    for name, text in texts(chain).items():
        (GOLDEN / name).write_text(text, encoding="utf-8")
        print(name)
screens.FOLDER.mkdir(exist_ok=True)
for name, text in screens.texts():
    (screens.FOLDER / name).write_text(text, encoding="utf-8")
    print(name)
