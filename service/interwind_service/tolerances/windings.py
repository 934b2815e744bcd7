"""Thresholds of the verdict, of repair and of readings."""

# Verdict. Matrices formed as products of several factors differ from their transpose by some hundred roundings.
SYMMETRY_ROUNDING = 1e-12
# A stated band counts two standard deviations (contract of the verdict).
STATED_DEVIATIONS = 2.0
# Two entries of one pair further apart than five standard deviations of their difference: by chance one in two million.
ASYMMETRY_ERROR_DEVIATIONS = 5.0
# Beyond these no arithmetic in double precision is left to judge by; they are slips, and refused by name.
COMPUTABLE_H = (1e-100, 1e100)
COMPUTABLE_COUPLING = 1e12
COMPUTABLE_WIDTH = 1e20
# |k| = 1 formed as M / sqrt(L_i L_j) carries three roundings on each side of 1.
COUPLING_ROUNDING = 1e-15
# Null directions of two windings count as parallel when the squared sine is below this: K is within 1e-12 of singular.
PARALLEL_SINE_SQUARED = 1e-12
# At most this many culprits are listed; the rest can be read off the feasible intervals.
CULPRITS_LISTED = 2000
# Ranking of culprits: weight of the logarithm of the smallest eigenvalue against the weakest link of the polygon.
CULPRIT_MARGIN_WEIGHT = 0.1
# Ranking of culprits: cubes of windings worked through; about half a second.
CULPRIT_RANKING_WORK = 2e7
# Smallest impossible subsets: triples are tested by their determinant, up to this many windings (1.3 million triples).
SUBSET_TRIPLE_WINDINGS = 200
# Larger subsets take an eigenvalue problem each; this many take about a quarter of a second.
SUBSETS_EXAMINED = 30_000
# Taking windings off one by one costs a decomposition each; above this many the subset found is left as it is.
SUBSET_DELETION_WINDINGS = 100
# At most this many impossible subsets are named, the most impossible first.
SUBSETS_NAMED = 10
# A leakage known worse than this is named; clamps and filters are designed on a tenth (common practice, no source).
LEAKAGE_ACCURACY = 0.1
# At most this many pairs are named one by one for one reason, the worst first.
PAIRS_NAMED = 10
# Couplings smaller than this may well be of either sign: a flip is only suggested above it.
SIGN_MATTERS_ABOVE = 0.3
# A slip explains a coupling when its feasible interval is narrower than this part of the value that would fit.
SLIP_INTERVAL_SHARE = 0.25
# What slips of unit are made of: milli, micro and nano mistaken for one another.
UNIT_SLIPS = (1e3, 1e-3, 1e6, 1e-6, 1e9, 1e-9)
# Self-inductances further apart than the square of the largest turns ratios in practice, 1 : 10 000, are doubted.
SELF_INDUCTANCE_RATIO = 1e8
# Below a hundredth of a nanohenry there is no conductor, above ten kilohenries no winding (common practice, no source).
SELF_INDUCTANCE_RANGE_H = (1e-11, 1e4)
# A winding is doubted for a unit when all others couple at least this well and it would, too, with the unit mended.
TIGHT_COUPLING = 0.9
# Rules of thumb for units and sides take some decompositions a winding; up to this size below a tenth of a second.
PLAUSIBILITY_WINDINGS = 40
# A leakage looks referred to the other side when off by L_i / L_j to within this factor, and by more than the next.
SIDE_FACTOR_MATCH = 2.0
SIDE_FACTOR_LEAST = 4.0
# Two windings whose every entry agrees to this are one conductor entered twice, or two that nothing tells apart.
DUPLICATE_AGREEMENT = 1e-9
# Two ends of a feasible interval closer than this are one value, reached by different roundings.
INTERVAL_ROUNDING = 1e-12
# Eigenvalues below this part of the largest hang on the tenth digit of the data, which hardly any data have.
NEARLY_SINGULAR = 1e-10
# A text lists this many labels and counts the rest; the finding itself holds all of them.
LABELS_SPELLED_OUT = 12
# A winding is named in a verdict when it carries at least this share of the squared witness vector.
WITNESS_SHARE = 0.02
# Unknown pairs named one by one: each is a reading to take, so more of them than of others.
UNKNOWN_PAIRS_NAMED = 100
# Barrier method for unknown pairs: duality gap at which the best smallest eigenvalue counts as found.
COMPLETION_GAP = 1e-10
# The barrier is centred when the Newton decrement is below this: the gap is then within a few per cent of n mu.
BARRIER_DECREMENT = 1e-2
# Factor of the barrier parameter between centrings; a shorter one takes fewer steps each and more centrings.
BARRIER_SHRINK = 0.1
# A centring that takes more Newton steps than this is stalled by rounding; the next one starts from where it is.
BARRIER_STEPS = 40
# Newton steps solve one dense system in the unknown pairs; fifty steps with 1000 of them take some seconds.
COMPLETION_UNKNOWNS = 1000
# Intervals over every completion of a loose pattern take two barrier solutions a pair: below a second up to here.
COMPLETION_INTERVAL_WINDINGS = 10
# Unknown pairs of a chordal pattern take a search of the pattern each: some milliseconds.
COMPLETION_INTERVAL_PAIRS = 200
# Beyond that, only pairs the certificate weighs most are tried as culprits: cubes of unknown pairs worked through.
COMPLETION_CULPRIT_WORK = 1e6

# Completion. Newton decrement at which log det is within its square, 1e-20, of the largest.
COMPLETION_DECREMENT = 1e-10
# Damped Newton steps of a self-concordant function: some ten for each factor e of the determinant to gain, then
# quadratic.
COMPLETION_STEPS = 200
# One Newton step solves a dense system in the unknown pairs: 2000 of them take about a second.
COMPLETION_UNKNOWN_PAIRS = 2000

# Nearest matrix. Fixed entries met to this part of their norm: some hundred roundings of the eigenvalue decomposition.
NEAREST_RESIDUAL = 1e-14
# The nearest matrix is asked to stay this many of those residuals a winding inside the cone, so that rounding cannot
# put it outside.
NEAREST_CLEARANCE = 4.0
# Newton steps: quadratic convergence takes 5 to 15, a problem with hardly any room above the floor more.
NEAREST_STEPS = 100
# Conjugate gradient steps for one Newton direction, and the accuracy asked of the first directions (Qi & Sun 2006).
NEAREST_CG_STEPS = 200
NEAREST_FORCING = 1e-2
# Part of the linear gain that a step must keep (Armijo 1966).
SUFFICIENT_DECREASE = 1e-4

# Repair. A leakage that moves by more than a tenth is named: printed leakages are rarely known better.
LEAKAGE_MOVED_RATIO = 1.1

# Characterization. A winding group whose scaled matrix is closer to singular than this leaves its currents open.
SINGULAR_RECIPROCAL_CONDITION = 1e-13
# What a connection leaves below this part of the largest self-inductance is rounding and no inductance.
NO_INDUCTANCE = 1e-14
# The cantilever circuit of N windings has N²/2 branches; beyond this nobody reads it.
EQUIVALENT_WINDINGS = 32
# A star that misses a pair leakage by more than one per cent is said to be a fit: printed leakages are as good as that.
STAR_ERROR = 0.01

# Intake. A reading within one per cent of the bare inductance is usable as it stands: bench readings are no better.
CORRECTION_NEGLIGIBLE = 0.01
# A correction by more than half of the bare value rests on its capacitance, resistance or Q more than on the reading.
CORRECTION_LIMIT = 0.5
# Relative step of a central difference: the cube root of the rounding, about.
DERIVATIVE_STEP = 1e-5
# First guess. A pair that nothing speaks of starts half coupled: at zero a short-circuit reading has no slope.
FIRST_COUPLING = 0.5
# Noise that reads |k| above 1 starts just inside; the whole matrix starts with this smallest eigenvalue at least, well
# inside the cone, for the steps to have room (of 90 wild mixtures a start at 1e-6 lost ten more).
FIRST_COUPLING_LARGEST = 0.999999
FIRST_MARGIN = 1e-2
# An inverse matrix that was read, scaled to unit diagonal, is taken for singular below this: its L has no digit left.
INVERSE_MARGIN = 1e-12
# Fit. Marquardt damping: start, the least that still steers, and the one at which no step gains any more.
FIT_DAMPING_START = 1e-3
FIT_DAMPING_LEAST = 1e-15
FIT_DAMPING_LARGEST = 1e12
# The steps have settled when chi-square falls by less than this part of itself: then no entry moves by a hundredth of
# its deviation any more, and exact readings, whose chi-square goes to 0, are followed down to rounding. 5 to 20 are
# usual.
FIT_GAIN = 1e-6
FIT_STEPS = 200
# Parts of a step in the matrix itself that are tried before one in its factor.
FIT_FREE_PARTS = (1.0, 0.5, 0.1)
# Sizes of a reading, H, 1/H or ratio: cubes of what lies beyond leave the range of a double.
READING_LEAST = 1e-30
READING_LARGEST = 1e30
# Uncertainties over the scale of their reading. Weights further apart than these lose the blunter reading in rounding.
READING_SHARPEST = 1e-12
READING_BLUNTEST = 1e3
# Readings scaled to norm 1 that determine a direction only below this say nothing about it beyond rounding.
UNDETERMINED_SINGULAR_VALUE = 1e-9
# A residual that keeps less than this part of its variance belongs to a reading that alone decides its own value.
FREE_READING = 1e-9
# One false alarm in a hundred identifications, whatever the number of readings (Bonferroni).
OUTLIER_PROBABILITY = 0.01
# Chi-square beyond its one-in-a-thousand point: the uncertainties do not hold.
CONTRADICTION_PROBABILITY = 1e-3
# Of two readings left out in turn the one is better only when chi-square falls further by this (one in twenty, one
# degree of freedom), or by this part of what it frees where that is less.
RIVAL_CHI_SQUARE = 3.84
SAME_CHI_SQUARE = 0.1
# A free step gaining more than this part of chi-square: the fit is held by the edge of the cone. Also the way back in.
EDGE_GAIN = 1e-6
# Readings left out in turn where some contradict: a fit each, some ten milliseconds.
READINGS_LEFT_OUT = 60
# Without the wrong reading a fit settles in 10 to 20 steps; one that does not still holds it.
LEFT_OUT_STEPS = 30
# A reading this near to a known slip (side, unit, factor two) of what the others say is told as that slip.
SLIP_RATIO = 1.1
# Next reading. Each candidate is taken to be read to one per cent; a gain of less than five per cent is none.
NEXT_READING_UNCERTAINTY = 0.01
NEXT_READING_GAIN = 0.05

# Many variants. Smallest eigenvalue of a coupling matrix over n from which no rounding makes it negative: thousands of
# roundings.
CLEAR_EIGENVALUE = 1e-12
