"""Electric and magnetic constant, CODATA 2022.

The 2018 values differ by less than 1e-9 relative, which no result here can show.
"""

EPSILON_0 = 8.8541878188e-12  # F/m
MU_0 = 1.25663706127e-6  # H/m
