"""Coefficients of RODAS4: a stiffly accurate, L-stable Rosenbrock method of order 4(3) with six stages.

Hairer & Wanner 1996, section VI.4 (method of Hairer, in the transformed variables u = Γ k). The digits are from memory
of the published code; the order test of the suite holds them to order 4, and the interpolant to order 3.
"""

from __future__ import annotations

import numpy as np

GAMMA = 0.25

# Abscissae of the stages.
C_TIME = np.array([0.0, 0.386, 0.21, 0.63, 1.0, 1.0])

# Weights of the derivative with respect to time.
D_TIME = np.array([0.25, -0.1043, 0.1035, -0.03620000000000023, 0.0, 0.0])

# Arguments of the stages: y + Σ A_ij u_j; the last two rows repeat the fifth and add u_5, then u_6 gives the result.
A = np.array([
    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
    [1.544, 0.0, 0.0, 0.0, 0.0, 0.0],
    [0.9466785280815826, 0.2557011698983284, 0.0, 0.0, 0.0, 0.0],
    [3.314825187068521, 2.896124015972201, 0.9986419139977817, 0.0, 0.0, 0.0],
    [1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 0.0, 0.0],
    [1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1.0, 0.0],
])  # fmt: skip

# Couplings of the stages: Σ C_ij u_j / h.
C = np.array([
    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
    [-5.6688, 0.0, 0.0, 0.0, 0.0, 0.0],
    [-2.430093356833875, -0.2063599157091915, 0.0, 0.0, 0.0, 0.0],
    [-0.1073529058151375, -9.594562251023355, -20.47028614809616, 0.0, 0.0, 0.0],
    [7.496443313967647, -10.24680431464352, -33.99990352819905, 11.70890893206160, 0.0, 0.0],
    [8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136, -6.058818238834054, 0.0],
])  # fmt: skip

# Interpolant: y(t + θh) = (1−θ) y0 + θ (y1 + (1−θ) (Σ H1_j u_j + θ Σ H2_j u_j)).
H = np.array([
    [10.12623508344586, -7.487995877610167, -34.80091861555747, -7.992771707568823, 1.025137723295662, 0.0],
    [-0.6762803392801253, 6.087714651680015, 16.43084320892478, 24.76722511418386, -6.594389125716872, 0.0],
])  # fmt: skip

# Weights of the result: y1 = y0 + Σ B_j u_j; its difference to order 3 is u_6.
B = A[5] + np.array([0.0, 0.0, 0.0, 0.0, 0.0, 1.0])
