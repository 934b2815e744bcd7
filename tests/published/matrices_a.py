"""The coupling matrices of area A, as printed; each names its source and how it was obtained."""

from __future__ import annotations

import numpy as np


def by_columns(text: str) -> np.ndarray:
    """A unit-diagonal matrix from its strict upper triangle, column by column, columns parted by semicolons."""
    columns = [[float(x) for x in part.split()] for part in text.split(";")]
    K = np.eye(len(columns) + 1)
    for j, column in enumerate(columns, start=1):
        K[:j, j] = K[j, :j] = column
    return K


def by_rows(text: str) -> np.ndarray:
    """A unit-diagonal matrix from its strict upper triangle, row by row, rows parted by semicolons."""
    rows = [[float(x) for x in part.split()] for part in text.split(";")]
    K = np.eye(len(rows) + 1)
    for i, row in enumerate(rows):
        K[i, i + 1 :] = K[i + 1 :, i] = row
    return K


# looked up: github.com/higham/matrices-correlation-invalid @7ce2733, high02.m (BSD-2-Clause); Higham 2002 from memory
HIGH02 = np.array([[1.0, 1, 0], [1, 1, 1], [0, 1, 1]])

# looked up: support.nag.com nagdoc_27.2 examples/baseresults/g02aa_passive_dcoe.r.html
TRIDIAGONAL = np.eye(4) - np.eye(4, k=1) - np.eye(4, k=-1)

# Turkay, Epperlein & Christofides, J. Risk 5(4) 2003, p. 86; looked up: same collection, tec03.m
TEC03 = by_rows("-0.55 -0.15 -0.1; 0.9 0.9; 0.9")

# Finger, RiskMetrics Monitor Q4 1997, Table 4; looked up: same collection, fing97.m
FING97 = by_rows(
    "0.18 -0.13 -0.26 0.19 -0.25 -0.12; 0.22 -0.14 0.31 0.16 0.09; 0.06 -0.08 0.04 0.04;0.85 0.85 0.85; 0.85 0.85; 0.85"
)

# Bentler & Yuan, Psychometrika 76 (2011) 119-123, Table 1; looked up: same collection, beyu11.m
BEYU11 = by_rows(
    "0.2387 0.6161 0.6167 0.6621 0.5173 0.6758 0.7071 0.7983 0.5769 0.4705 0.7881;"
    "0.3506 0.3537 0.2959 0.4637 0.1931 0.1202 0.2316 0.1708 0.4047 0.1161;"
    "0.8579 0.6603 0.4093 0.3826 0.5164 0.6079 0.5574 0.4512 0.5128;"
    "0.7477 0.1803 0.4705 0.6167 0.6218 0.4705 0.3582 0.2966;"
    "0.3537 0.7364 0.5670 0.6613 0.5140 0.5140 0.4610;"
    "0.3582 0.1803 0.0605 0.4705 0.3582 0.6161;"
    "0.4705 0.6424 0.6090 0.4911 0.4962;"
    "0.7149 0.4705 0.3582 0.5164;"
    "0.4371 0.4371 0.6079;"
    "0.3745 0.4512;"
    "0.4512"
)

# Tyagi & Das, Comput. Oper. Res. 26 (1999) 1041-1058; looked up: same collection, tyda99r2.m and tyda99r3.m
TYDA99R2 = by_columns(
    "0.1; 1 0.4; 0.8 0.1 0.2; 0.7 0.4 0.3 0.8; 0.1 0.4 0.8 0.3 0; 0.3 0.2 0.9 0.3 0.5 0.4; 0.3 0.6 0.8 0.1 1 0.2 0.6"
)
TYDA99R3 = by_columns(
    "-0.5; -0.5 0.5; 0.5 -0.5 -0.5; -0.5 0.5 0.5 -0.5; 0.5 0.5 -0.5 0.5 0.5; 0.5 0.5 -0.5 0.5 -0.5 0.5;"
    "-0.5 0.5 0.5 -0.5 0.5 0.5 -0.5"
)

# looked up: the R values in test_corrpsd.py of a statistics library; Knol & ten Berge 1989
KNOL = by_rows("0.477 0.644 0.478 0.651 0.826; 0.516 0.233 0.682 0.75; 0.599 0.581 0.742; 0.741 0.8; 0.798")
