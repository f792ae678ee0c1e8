"""Coefficients of the stiff time integrator that the bubble kernels share.

ROS34PW2: four stages, order three for any approximate Jacobian (a W-method), L-stable, with an
embedded method of order two. Source: Rang and Angermann, BIT Numer. Math. 45 (2005) 761-787.
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
