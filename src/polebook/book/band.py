"""Band figures of the whole chain: their formulas. They are solved in `polebook.solve.edges` and `winding`."""

from __future__ import annotations

from polebook.formula import Formula

FORMULAS = (
    Formula("overall.unstable", "n_R = (N - turn/(pi/2))/2 > 0, turn that of arg det(G + j·2·pi·f·C) for f from 0+ to "
                                "infinity, N the finite poles not at 0",
            "argument principle (any text on complex analysis)"),
    Formula("overall.lower_edge_hz", "first f below the band seed where |H(f)| = |gain|/sqrt 2", "definition"),
    Formula("overall.upper_edge_hz", "first f above the band seed where |H(f)| = |gain|/sqrt 2", "definition"),
    Formula("overall.peaking_db", "20·log10(max|H|/|gain|), not below 0", "definition"),
    Formula("overall.reference_hz", "the target's reference, else the band seed sqrt(f_L·f_H) of the two estimates",
            "definition"),
    Formula("overall.reference_hz.moved", "the band seed: where the estimates' middle lies outside the band, the "
                                          "frequency of 40 a decade at which |H| is nearest to |gain|", "definition"),
    Formula("overall.gain_at_reference", "|H| at the reference frequency: the product of the lines' sizes there",
            "definition"),
    Formula("overall.gain_db", "20·log10|gain|", "definition"),
)
