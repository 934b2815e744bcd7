"""Thresholds of the frequency and port response."""

# Frequencies other than 0: beyond, their products with element values leave floating point.
LEAST_FREQUENCY_HZ = 1e-20
LARGEST_FREQUENCY_HZ = 1e20
# Stacks of systems up to this size are inverted together; beyond, LAPACK one by one is faster.
STACKED_SOLVE_SIZE = 32
# Passes of the equilibration: rows and columns are then within a factor 2 of each other.
EQUILIBRATION_PASSES = 3
# Condition, after scaling, from which a matrix in tree coordinates has no digit left: singular.
SINGULAR_CONDITION = 1e15
# One tree serves frequencies within this ratio; a chord is then at most so much larger than its tree branches.
TREE_BAND = 2.0
# Within a tight group a resistance this much above the least one is written apart; below, the sum loses three digits.
RESISTANCE_SPREAD = 1e3
# Complex numbers held at once by a stack of matrices: 64 MB.
STACK_ENTRIES = 4_000_000
# Imposed voltages round a loop, or currents into a part, that cancel to this share agree: some hundred roundings.
CONTRADICTION = 1e-13
# Members of a null vector above this share of its largest are named.
NULL_VECTOR_SHARE = 0.1
# |b - A x| after one refinement is a few roundings; four digits more are left for large systems.
RESIDUAL_LIMIT = 1e-11
# Terminal quantities are seen against this share of the largest that the solution could have shown: 1e-6 stands ten
# digits above its rounding noise.
NOISE_SHARE = 1e-6
# Reciprocity and passivity of R, L, C, windings and ideal transformers, over the largest entry: what K-01 asks.
RECIPROCITY_LIMIT = 1e-9
PASSIVITY_LIMIT = -1e-9

# Beyond this many nodes and branches Y and S of a port response follow from Z, where its condition is below the
# other: a few digits of twelve are lost.
PORT_SOLVES_BRANCHES = 600
PORT_INVERSE_CONDITION = 1e4
# A swept band and the frequency tree agree to this, voltages and currents each over their largest.
SWEEP_AGREEMENT = 1e-10
# Points of a swept band at which the energy of its windings is looked at for cautions.
LOUDEST_POINTS = 6

# Rows of a Schur form substituted together: 8 to 64 cost the same within a fifth.
SCHUR_BLOCK = 16

# One resolvent serves this ratio of frequencies: five decades leave 1e-10 in all but one of 200 random networks whose
# values span twelve decades; that one is found at the ends of its band.
SWEEP_BAND = 1e5
# A span this little above a whole number of bands is one of them still.
SWEEP_BAND_ROUNDING = 1e-3
# Halvings of a band that the frequency tree contradicts, before its frequencies are solved one by one.
SWEEP_HALVINGS = 3
# Frequencies this near a pole, relative to it, are solved one by one: nearer, the Schur form loses more than six
# digits.
SWEEP_POLE_DISTANCE = 1e-6
# Fewer frequencies than this are solved one by one sooner than by one reduction.
SWEEP_POINTS = 40

# Stacks of variants. Pivots of at least this share of their column: growth of 10 a step at most.
STACK_PIVOT_SHARE = 0.1
# A pivot that is what is left of terms so much larger may hide a singular system: one by one then.
STACK_CANCELLATION = 1e-8
# Componentwise |b - A x| over |A| |x| + |b|: some fifty roundings.
STACK_BACKWARD_ERROR = 1e-14
# Unknowns up to which a straight line of array operations beats a factorization each.
STACK_UNKNOWNS = 40
# Systems of a block: the arrays of a step then stay in the second-level cache.
STACK_BLOCK = 8192

# From this many nodes and branches on, networks of small winding groups are solved by sparse factors of the nodal
# matrix.
SPARSE_UNKNOWNS = 3000
# Coupled pairs an unknown up to which a network counts as sparse: windings in groups of up to some twenty.
SPARSE_COUPLING = 20
# A residual above this is more than the rounding of one sparse solve, and worth a refinement.
SPARSE_REFINED_RESIDUAL = 1e-15
# The diagonal serves as pivot down to this share of its column: growth of 10 a step at most, and far fewer entries.
SPARSE_PIVOT_SHARE = 0.1
# So far beside a singular frequency the solution is looked at for its culprits, relative to the frequency.
ASIDE = 1e-7

# Poles. A dense eigenproblem of this many states takes some ten seconds.
MODAL_STATES = 1500
# Where the state equations are centred, 1/s, before the modes are known; they are centred again on what is found.
MODAL_FIRST_SHIFT = 1e6
# Where modes may be looked for, Hz: from periods of a year to beyond any lumped network.
MODAL_LEAST_HZ = 1e-8
MODAL_MOST_HZ = 1e15
# A generalized eigenvalue this far above the largest entry of A is a zero at infinity, moved by rounding.
INFINITE_ZERO = 1e-10
# Adaptive sweep: even points a decade, and points on the flanks of a mode in half bandwidths from its centre.
ADAPTIVE_POINTS_A_DECADE = 15
ADAPTIVE_FLANKS = (-4.0, -2.0, -1.0, -0.5, 0.0, 0.5, 1.0, 2.0, 4.0)
# The grid that finds what is missed has this many points between two chosen ones.
ADAPTIVE_CHECK = 8
# Each zoom narrows a peak's bracket to a quarter: twelve leave 1e-8 of the first one.
ADAPTIVE_ZOOMS = 12
# Rounds of adding missed peaks; two are enough but where many modes overlap.
ADAPTIVE_ROUNDS = 4
# Two frequencies closer than this are one: a tenth of the part in a million that a peak is told to.
ADAPTIVE_SAME = 1e-7
# Peaks 60 dB below the largest of an observable are listed only when the points miss them.
ADAPTIVE_PROMINENT = 1e-3
# Tolerances below this are lost in the rounding of the peak itself.
ADAPTIVE_LEAST_DB = 1e-6

# Port figures. Beyond this condition of the terminated ports a figure keeps fewer than six of the twelve digits of S.
FIGURE_CONDITION = 1e6
# A link whose ports lose less than this share of what they carry has no best load: it is lossless to rounding.
LINK_LOSS_FLOOR = 1e-12
# Power over loss below this is rounding: nothing is coupled.
LINK_COUPLING_FLOOR = 1e-14
