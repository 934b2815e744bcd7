"""Thresholds of numbering and structure."""

# Magnitudes of element values and drives: beyond, products of a few of them leave floating point. No assembly has any.
LEAST_MAGNITUDE = 1e-30
LARGEST_MAGNITUDE = 1e30
# A group whose smallest pivot is above this keeps 14 digits of every leakage in plain currents.
LOOSE_PIVOT = 1e-2
# Among the pivots within this share of the largest, the least resistive winding goes first; entries of U stay below 7.
PIVOT_SHARE = 0.02
# A pivot of at most this many times n is rounding of the stated matrix: the coupling is perfect.
PERFECT_COUPLING_PIVOT = 4 * 2.0**-52
# Dense matrices of this many unknowns take 2 x 200 MB.
DENSE_UNKNOWNS = 5000
