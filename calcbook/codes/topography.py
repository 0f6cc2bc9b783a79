"""Wind over hills, ridges and escarpments, as the editions share it."""

from __future__ import annotations

from calcbook.codes.clause import template

HILL = (
    template(
        "least hill height",
        "topographic condition",
        "Height from which a hill counts",
        name="H_min",
        kind="length",
        cases=(
            ("exposure == 'B'", "'18 m'"),
            ("exposure == 'C' or exposure == 'D'", "'4.5 m'"),
        ),
        cases_us=(
            ("exposure == 'B'", "'60 ft'"),
            ("exposure == 'C' or exposure == 'D'", "'15 ft'"),
        ),
        from_memory=True,
    ),
    template(
        "hill shape ratio",
        "topographic figure",
        "Ratio of K_1 to H/L_h by the shape of the hill",
        name="r_1",
        kind="number",
        cases=(
            ("hill == 'ridge' and exposure == 'B'", "1.30"),
            ("hill == 'ridge' and exposure == 'C'", "1.45"),
            ("hill == 'ridge' and exposure == 'D'", "1.55"),
            ("hill == 'escarpment' and exposure == 'B'", "0.75"),
            ("hill == 'escarpment' and exposure == 'C'", "0.85"),
            ("hill == 'escarpment' and exposure == 'D'", "0.95"),
            ("hill == 'axisymmetric hill' and exposure == 'B'", "0.95"),
            ("hill == 'axisymmetric hill' and exposure == 'C'", "1.05"),
            ("hill == 'axisymmetric hill' and exposure == 'D'", "1.15"),
        ),
        from_memory=True,
    ),
    template(
        "hill height multiplier",
        "topographic figure",
        "Topographic multiplier for the shape of the hill",
        name="K_1",
        kind="number",
        formula="r_1*min(H/L_h, 0.5)",
        note="A hill steeper than H/L_h = 0.5 counts as one of 0.5.",
        from_memory=True,
    ),
    template(
        "effective hill length",
        "topographic figure",
        "Half-length of the hill as used in K_2 and K_3",
        name="L_e",
        kind="length",
        formula="max(L_h, 2*H)",
        note="2H where the hill is steeper than H/L_h = 0.5. Our symbol for L_h so limited.",
        from_memory=True,
    ),
    template(
        "hill distance constant",
        "topographic figure",
        "Decay of the speed-up with distance from the crest",
        name="mu",
        kind="number",
        cases=(
            ("hill == 'escarpment' and x > '0 m'", "4.0"),
            ("hill != 'escarpment' or x <= '0 m'", "1.5"),
        ),
        note="x is positive downwind of the crest.",
        from_memory=True,
    ),
    template(
        "hill elevation constant",
        "topographic figure",
        "Decay of the speed-up with height above ground",
        name="gamma",
        kind="number",
        cases=(
            ("hill == 'ridge'", "3.0"),
            ("hill == 'escarpment'", "2.5"),
            ("hill == 'axisymmetric hill'", "4.0"),
        ),
        from_memory=True,
    ),
    template(
        "hill distance multiplier",
        "topographic figure",
        "Topographic multiplier for the distance from the crest",
        name="K_2",
        kind="number",
        formula="max(0, 1 - abs(x)/(mu*L_e))",
        from_memory=True,
    ),
    template(
        "hill elevation multiplier",
        "topographic figure",
        "Topographic multiplier for the height above ground",
        name="K_3",
        kind="number",
        formula="exp(-gamma*z/L_e)",
        from_memory=True,
    ),
    template(
        "topographic factor",
        "topographic factor",
        "Topographic factor",
        name="K_zt",
        kind="number",
        cases=(
            ("hill != 'none' and H/L_h >= 0.2 and H >= H_min", "(1 + K_1*K_2*K_3)**2"),
            ("hill == 'none' or H/L_h < 0.2 or H < H_min", "1.0"),
        ),
        note=(
            "Whether the hill is isolated, stands clear of its surroundings and carries the "
            "building on its upper half is for the engineer to judge. Limits from memory."
        ),
        from_memory=True,
    ),
)
