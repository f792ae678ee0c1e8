"""Coefficients of the stiff time integrator that the bubble kernels share.

ROS34PW2: four stages, order three for any approximate Jacobian (a W-method), L-stable, with an
embedded method of order two. Source: Rang and Angermann, BIT Numer. Math. 45 (2005) 761-787
(coefficients from memory; the order is tested).
The published alpha, gamma and b are transformed so that no stage multiplies by the Jacobian
(Hairer and Wanner, Solving Ordinary Differential Equations II, sec. IV.7).
"""

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]

GAMMA = 4.3586652150845900e-01
ALPHA: Floats = np.array([
    [0.0, 0.0, 0.0, 0.0],
    [8.7173304301691801e-01, 0.0, 0.0, 0.0],
    [8.4457060015369423e-01, -1.1299064236484185e-01, 0.0, 0.0],
    [0.0, 0.0, 1.0, 0.0],
])  # fmt: skip
FULL_GAMMA: Floats = np.array([
    [GAMMA, 0.0, 0.0, 0.0],
    [-8.7173304301691801e-01, GAMMA, 0.0, 0.0],
    [-9.0338057013044082e-01, 5.4180672388095326e-02, GAMMA, 0.0],
    [2.4212380706095346e-01, -1.2232505839045147, 5.4526025533510214e-01, GAMMA],
])  # fmt: skip
WEIGHTS: Floats = np.array(
    [2.4212380706095346e-01, -1.2232505839045147, 1.5452602553351020, 4.3586652150845900e-01]
)
EMBEDDED: Floats = np.array(
    [3.7810903145819369e-01, -9.6042292212423178e-02, 5.0e-01, 2.1793326075422950e-01]
)

_INVERSE = np.linalg.inv(FULL_GAMMA)
STAGE: Floats = ALPHA @ _INVERSE  # u_i = u + sum_j STAGE[i, j] U_j
COUPLING: Floats = np.eye(4) / GAMMA - _INVERSE  # the c_ij / h terms
NEW: Floats = WEIGHTS @ _INVERSE  # u_new = u + sum_i NEW[i] U_i
ERROR: Floats = (WEIGHTS - EMBEDDED) @ _INVERSE
NODES: Floats = ALPHA.sum(axis=1)  # stage times t + NODES[i] h

# RODAS: six stages, order four with an embedded method of order three, stiffly accurate; needs the
# exact Jacobian and time derivative, so it serves the small lumped system. Source: Hairer and
# Wanner, Solving Ordinary Differential Equations II, 2nd ed., sec. IV.7 and IV.10 (from memory;
# the order is tested).
RODAS_GAMMA = 0.25
RODAS_NODES: Floats = np.array([0.0, 0.386, 0.21, 0.63, 1.0, 1.0])
RODAS_TIME: Floats = np.array([0.25, -0.1043, 0.1035, -0.3620000000000023e-1, 0.0, 0.0])
RODAS_STAGE: Floats = np.array([
    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
    [1.544, 0.0, 0.0, 0.0, 0.0, 0.0],
    [0.9466785280815826, 0.2557011698983284, 0.0, 0.0, 0.0, 0.0],
    [3.314825187068521, 2.896124015972201, 0.9986419139977817, 0.0, 0.0, 0.0],
    [1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 0.0, 0.0],
    [1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1.0, 0.0],
])  # fmt: skip
RODAS_COUPLING: Floats = np.array([
    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
    [-5.6688, 0.0, 0.0, 0.0, 0.0, 0.0],
    [-2.430093356833875, -0.2063599157091915, 0.0, 0.0, 0.0, 0.0],
    [-0.1073529058151375, -9.594562251023355, -20.47028614809616, 0.0, 0.0, 0.0],
    [7.496443313967647, -10.24680431464352, -33.99990352819905, 11.70890893206160, 0.0, 0.0],
    [8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136,
     -6.058818238834054, 0.0],
])  # fmt: skip
