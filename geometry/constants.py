"""Physical constants, SI."""

VACUUM_PERMITTIVITY = 8.8541878188e-12
"""eps0, F/m. Source: CODATA 2022."""
SPEED_OF_LIGHT = 299_792_458.0
"""c, m/s, exact; mu0 eps0 = 1/c^2."""
