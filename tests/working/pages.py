"""Workings as a reader sees them: what the golden holds.

`python -m tests.working.pages` remakes it; read the difference before you keep it.
"""

from pathlib import Path

from polebook.report.look import Look
from polebook.report.working import working
from tests.working.chains import every, known

GOLDEN = Path(__file__).parent / "pages.txt"
SHOWN = {
    "wire-break-listener": (
        "overall.upper_edge_hz", "overall.gain", "Q1.gain", "Q1.input_ohm", "Q1.output_ohm", "n1.pole_hz", "n1.room",
        "n1.lost_upper_db", "Q2.c_comp.at_input", "Q2.c_comp.tau_s", "Q2.c_comp.owns_upper", "Q2.ce.tau_s",
        "bias.Q1.current_a", "bias.Q3.control_v", "Q1.gm.value", "Q1.cmu.value", "target.upper.margin",
        "Q1.rc.leverage.gain", "Q1.transfer_ohm",
    ),
    "six-stage": ("Q4.mid.ohm", "Q1.open_gain", "bias.Q4_upper.current_a", "bias.Q5.current_a"),
    "photodiode-front": ("U1.input_ohm", "n1.lost_upper_db", "U1.gbw.value", "U2.gain"),
}


def pages():
    """Every page of the golden, one after the other."""
    return "\n\n".join(
        working(every(chain)[name].document(), known(chain).chain.title, f"chains/{chain}.toml", Look())
        for chain, shown in SHOWN.items() for name in shown
    )


if __name__ == "__main__":
    GOLDEN.write_text(pages(), encoding="utf-8")
