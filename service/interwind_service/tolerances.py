"""Every threshold of the service: name, value, and the reason for it. No other file holds one."""

# --- windings -------------------------------------------------------------------------------------------------------

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
# Damped Newton steps of a self-concordant function: some ten for each factor e of the determinant to gain, then quadratic.
COMPLETION_STEPS = 200
# One Newton step solves a dense system in the unknown pairs: 2000 of them take about a second.
COMPLETION_UNKNOWN_PAIRS = 2000

# Nearest matrix. Fixed entries met to this part of their norm: some hundred roundings of the eigenvalue decomposition.
NEAREST_RESIDUAL = 1e-14
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
# Noise that reads |k| above 1 starts just inside; the whole matrix starts with this smallest eigenvalue at least.
FIRST_COUPLING_LARGEST = 0.999999
FIRST_MARGIN = 1e-6
# Fit. Marquardt damping: start, the least that still steers, and the one at which no step gains any more.
FIT_DAMPING_START = 1e-3
FIT_DAMPING_LEAST = 1e-15
FIT_DAMPING_LARGEST = 1e12
# The steps have settled when chi-square falls by less than this part of itself: then no entry moves by a hundredth of its
# deviation any more, and exact readings, whose chi-square goes to 0, are followed down to rounding. 5 to 20 are usual.
FIT_GAIN = 1e-6
FIT_STEPS = 200
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

# --- network --------------------------------------------------------------------------------------------------------

# A group whose smallest pivot is above this keeps 14 digits of every leakage in plain currents.
LOOSE_PIVOT = 1e-2
# Among the pivots within this share of the largest, the least resistive winding goes first; entries of U stay below 7.
PIVOT_SHARE = 0.02
# A pivot of at most this many times n is rounding of the stated matrix: the coupling is perfect.
PERFECT_COUPLING_PIVOT = 4 * 2.0**-52
# Dense matrices of this many unknowns take 2 x 200 MB.
DENSE_UNKNOWNS = 5000

# --- response: frequency --------------------------------------------------------------------------------------------

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
# Terminal quantities are seen against this share of the largest that the solution could have shown: 1e-6 stands ten digits
# above its rounding noise.
NOISE_SHARE = 1e-6
# Reciprocity and passivity of R, L, C, windings and ideal transformers, over the largest entry: what K-01 asks.
RECIPROCITY_LIMIT = 1e-9
PASSIVITY_LIMIT = -1e-9

# A swept band and the frequency tree agree to this, voltages and currents each over their largest.
SWEEP_AGREEMENT = 1e-10
# Points of a swept band at which the energy of its windings is looked at for cautions.
LOUDEST_POINTS = 6

# Rows of a Schur form substituted together: 16 to 64 cost the same within a third, 32 least.
SCHUR_BLOCK = 32

# One resolvent serves this ratio of frequencies: five decades leave 1e-10 in all but one of 200 random networks whose
# values span twelve decades; that one is found at the ends of its band.
SWEEP_BAND = 1e5
# A span this little above a whole number of bands is one of them still.
SWEEP_BAND_ROUNDING = 1e-3
# Halvings of a band that the frequency tree contradicts, before its frequencies are solved one by one.
SWEEP_HALVINGS = 3
# Frequencies this near a pole, relative to it, are solved one by one: nearer, the Schur form loses more than six digits.
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

# From this many nodes and branches on, networks of small winding groups are solved by sparse factors of the nodal matrix.
SPARSE_UNKNOWNS = 3000
# Coupled pairs an unknown up to which a network counts as sparse: windings in groups of up to some twenty.
SPARSE_COUPLING = 20
# A residual above this is more than the rounding of one sparse solve, and worth a refinement.
SPARSE_REFINED_RESIDUAL = 1e-15
# So far beside a singular frequency the solution is looked at for its culprits, relative to the frequency.
ASIDE = 1e-7

# Poles. A dense eigenproblem of this many states takes some ten seconds.
MODAL_STATES = 1500
# Where the state equations are centred, 1/s, before the modes are known; they are centred again on what is found.
MODAL_FIRST_SHIFT = 1e6
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

# --- response: time -------------------------------------------------------------------------------------------------

# Below this 1-norm the Taylor series of e^X needs no halving. Rungs are cheaper than terms where many states advance.
EXPONENTIAL_BASE_NORM = 2.0**-7
# Terms of that series: 2^-49 / 7! = 4e-19 is below the unit roundoff.
EXPONENTIAL_TAYLOR_DEGREE = 6
# Points of Gauss's rule for the integral of a product of two such series: its error is 1e-17.
EXPONENTIAL_GAUSS_POINTS = 3
# Structural pivots are sums of 0, +1, -1 and products of turns ratios: accepted ones exceed 1e-4, rejected ones are 0.
STRUCTURAL_PIVOT = 1e-9
# Among pivots within this share of the largest the storage of least energy is made the dependent one.
STRUCTURAL_PIVOT_SHARE = 0.05
# Entries of a product of structural matrices below this are sums that should be 0.
STRUCTURAL_ROUNDING = 1e-11
# Share of the largest entry of a null vector from which an element is named as a member.
STRUCTURAL_MEMBER = 1e-6
# A resolvent at s0 shows modes up to this many times s0 to 1e-13 of themselves; faster ones get an s0 of their own.
BAND_REACH = 1e3
# That s0 stands this much above the slowest mode of its block, so that it serves slower and faster ones of the block alike.
BAND_LEAD = 1e1
# Net current into a part without a return that counts as rounding, as a share of the largest source.
FORCED_CURRENT_ROUNDING = 1e-12
# Entries of the observability matrix of one block, 4 MB: it stays in the cache while all blocks pass by.
BLOCK_ENTRIES = 2**19
# Steps of a block, as powers of two: fewer than 8 cost calls, more than 256 bring nothing.
LEAST_BLOCK_BITS = 3
MOST_BLOCK_BITS = 8
# The same where events are dense: all blocks of a chunk take a step together, so few steps and many blocks are best.
WALKED_BLOCK_BITS = 5
# More events than one in so many steps count as dense.
SPARSE_EVENTS = 256
# Samples computed at once, 4 MB: what one chunk holds is bounded, whatever the length of the run.
CHUNK_ENTRIES = 2**19
# Stop over step may miss a whole number by this much: the rounding of decimal times, never a misread grid.
GRID_MISFIT = 1e-6
# Steps of one run: at 30 ns a step and 8 bytes a value a minute and the largest file a caller would read.
MAX_TIME_STEPS = 500_000_000
# Values of one response held at once: 512 MB. A streamed response has no such limit.
MAX_RESPONSE_VALUES = 64_000_000
# Share of the stored energy above which a jump at the start is worth saying.
INCONSISTENT_START = 1e-12
# Relative size of a singular value of A that counts as none when a point of rest is sought.
REST_RESIDUAL = 1e-13
# States kept during a run to test the equations at.
TESTED_STATES = 64
# A resolvent at s0 moves undamped slow modes by eps s0: over a run of this many 1/s0 their phase is off by 2e-10.
SLOW_PHASE = 1e6
# Multiples of s0 at which reduced equations with controlled sources are held against direct solves.
DESCRIPTOR_PROOFS = (1e-2, 1e1, 1e3, 1e5)
# Growth exponent of an unstable mode over a run: e^300 squared is still a number, for the energy's sake.
LARGEST_GROWTH = 300.0
# Controlled sources: values of s, 1/s, tried for the separation of finite modes from constraints, the largest first.
DESCRIPTOR_SHIFTS = (1e16, 1e14, 1e12, 1e10, 1e8, 1e6)
# There s times an eigenvalue of the resolvent is 1 for slow modes, 0.03 for one 30 times faster than s, 0 for a constraint.
FINITE_MODE = 0.03
# Least ratio between the two kinds; below it no count is certain.
DESCRIPTOR_GAP = 1e2
# The constant left by the constraints is compared at s0 and so many times s0, and agrees to the rounding of a bad tree.
DESCRIPTOR_CHECK = 30.0
DESCRIPTOR_ROUNDING = 1e-6
# A block of modes is counted from its rest value beside a drive this many times slower: its Sylvester equation is then
# as well conditioned as the block itself.
REST_SEPARATION = 10.0
# Corners of one waveform within one run: 4 million take 100 MB and a few seconds.
MAX_WAVEFORM_CORNERS = 4_000_000

# --- response: switching and periodic -------------------------------------------------------------------------------

IDEAL_EPSILON = 1e-9  # ideal 0 ohm and 0 S stand as this times Z and 1/Z; smaller loses lossless loops, larger shows
IMPEDANCE_REACH = 1e3  # farthest from the geometric mean that an impedance sets Z
DEPENDENT_ROW = 1e-9  # a unit voltage row that keeps less than this beside the others closes a loop
SINGULAR_TABLEAU = 1e-30  # reciprocal condition after scaling; ε networks reach 1e-20 and are solved well all the same
NULL_MEMBER = 1e-3  # share of the null vector from which an element is named
MODAL_EQUILIBRATION_PASSES = 4  # row and column passes; more change no exponent
CONJUGATE_PAIR = 1e-6  # relative distance at which two eigenvalues are one pair
NEAR_RESONANCE = 3e-3  # |λ - s| span below which drive and mode are joined by Taylor terms; else 1e-13 would be lost
RESONANCE_TERMS = 6  # powers of t in that series; the next is 3e-3^6 / 7!
SAME_INSTANT = 1e-14  # breakpoints closer than this share of the run are one
MAXIMUM_BREAKPOINTS = 2_000_000  # drive changes in one run; 64 MB of segments
GUARD_ROUNDING = 1e-12  # a guard above minus this share of its terms holds
SUM_ROUNDING = 2e-15  # a modal sum below this share of its terms is zero as far as anyone can tell
EVENT_INTERVAL = 1e-13  # share of its bracket to which an event is located
TIME_ROUNDING = 2.3e-16  # and of the time itself
EVENT_ITERATIONS = 120  # halvings always suffice
TIE = 1e-15  # share of the time within which changes of devices are one instant
TIES_PER_DEVICE = 3  # changes at one instant, after which the guards are given more slack
TIE_SLACK = 10.0  # times the rounding, each time
EVENTS_PER_INTERVAL = 2000  # diode changes between two drive changes; more is chatter
CHATTER_WINDOW = 50  # last changes from which a chatter is named
SCAN_BLOCK = 48  # grid points looked at first; doubles from block to block
GRID_FIRST = 0.25  # first look, in time constants of the fastest mode
GRID_RATIO = 0.35  # growth of the step with time
GRID_COARSEST = 24  # looks in the longest span, at least
GRID_ALIVE = 14.0  # an oscillation decayed by e to this power no longer needs looks
GRID_RADIANS = 0.7  # largest step of a living oscillation
GRID_POINTS = 4096  # looks kept for one piece; a longer span is run in several
SERIES_REACH = 0.5  # |a τ| up to which the integrals of t^n e^{at} are series
SERIES_TERMS = 14  # of it: 0.5^15 / 15! is rounding
GAUSS_NODES = 32  # Gauss-Legendre points; exact to rounding for |a τ| up to GAUSS_REACH
GAUSS_REACH = 20.0  # beyond it the upward recurrence is stable for every power used
SEGMENTS_TOGETHER = 256  # segments worked on at once: 20 MB for 50 rows of 20 terms
SAMPLES_TOGETHER = 4096  # samples worked on at once
SETTLED = 40.0  # time constants after which a jump is over: e^-40 is rounding
SETTLE_SHARE = 1e-3  # share of the sample step in which a jump at a sample must be over
JUMP_WEIGHT = 1e-9  # share of the state in quick modes from which a jump is under way
JUMP_SHARE = 0.5  # share of its decay in stand-ins of ideal elements that makes a mode a jump
PANEL_NODES = 12  # Gauss-Legendre points a panel; 0.7 rad, or half a turn of a harmonic, to rounding
PEAK_HEADROOM = 1.1  # a grid of 0.7 rad misses a crest by 6 % at most
PEAK_ROUNDS = 5  # each narrows a crest tenfold; its height is then right to the square of that
PEAK_POINTS = 21  # looks in a round
JUMP_SPAN = 1e-3  # a segment shorter than this share of the settling time is part of a jump
DEFAULT_TOLERANCE = 1e-6  # of the energy ledger and the residual, where the caller states none
REST_RANK = 1e-14  # singular values below this share are currents and voltages that rest does not fix
RESIDUAL_LOOKS = 16  # segment ends of a piece at which the equations are checked
COMMENSURATE = 1e-9  # share of a cycle by which a drive may miss the period
HARMONICS = 100  # harmonics that a periodic response carries
WARM_UP_PERIODS = 5  # plain periods before Newton's method; from rest the first one is far from any steady state
NEWTON_STEPS = 60  # steps of Newton's method in one go
NEWTON_REFUSALS = 25  # steps that did not help before plain periods are run in bursts
BURST_REFUSALS = 4  # the same after a burst
BURSTS = 4  # bursts before a network counts as not periodic
BURST_PERIODS = 150  # plain periods in a burst
PLAIN_PERIODS = 2  # plain periods after a step that did not help
LINE_SEARCH_TRIALS = 5  # shortenings of a step
LINE_SEARCH_FACTOR = 0.4  # of its length
LINE_SEARCH_DECREASE = 0.95  # share of the residual that must be left at most
PERIODIC_RESIDUAL = 1e-10  # |P(x) - x| / |x| of a periodic state
PERIODIC_STAGNATION = 1e-7  # the same where rounding times the condition of I - Phi allows no more
UNDETERMINED_OFFSET = 1e-12  # singular values of I - Phi below this leave an offset undetermined
SLOW_MULTIPLIER = 0.5  # multipliers above this are corrected when the full step does not help
LONGEST_REPETITION = 8  # periods after which a repetition is looked for
REPETITION_SPREAD = 1e-6  # relative spread that counts as a repetition
UNSTABLE_MARGIN = 1e-9  # above 1 by which a multiplier is unstable and not rounding
SLOW_WARNING = 0.9999  # a disturbance that keeps more than this over a period is told
DOUBLING_WARNING = -0.8  # a real multiplier below this is close to period doubling
REAL_MULTIPLIER = 1e-9  # relative imaginary part of a real multiplier
OTHER_START = 1.5  # times the state found: the second start
OTHER_START_PERIODS = 10  # periods spent on it
SAME_SOLUTION = 1e-6  # relative distance of two answers that are one
FINER_RUNS = 2  # runs with finer steps when the ledger of the first misses the tolerance
SIZE_FLOOR = 1e-3  # share of the expected |x| that the scale of errors starts from
SIZE_LOOKS = 9  # instants of an interval at which the drives are looked at for it
EXPONENT_CLIP = 60.0  # exponents beyond this are continued by the tangent: e^60 of any saturation current is no current
STIFF_VOLTAGE = 1e-9  # volts per volt of its wave below which a branch voltage is fixed by states and sources
WAVE_STEPS = 400  # Newton steps for consistent waves; an exponential takes one for each thermal voltage
WAVE_RESIDUAL = 1e-11  # relative residual of consistent waves
WAVE_HALVINGS = 30  # of one Newton step
STEP_SHARE = 0.2  # share of the tolerance that the local error of a step may take
FIRST_STEP = 1e-7  # share of an interval tried first
SMALLEST_STEP = 1e-15  # share of the time below which a step does not move it
STEP_GROWTH = 1.0 / 6.0  # smallest factor by which a step is divided (Hairer & Wanner 1996)
STEP_SHRINK = 5.0  # largest one
STEP_SAFETY = 0.9  # of the step that the error allows
FIRST_ERROR = 0.01  # floor of the previous error in predictive control
OVERFLOWN_ERROR = 1e10  # stands for an error that is no number
STEPS_TOGETHER = 512  # steps sampled and booked at once
PIECES_KEPT = 512  # combinations of device states kept
PIVOTS = 200  # pivots of the complementarity problem; three is the most seen
PIVOT_PATIENCE = 5  # block pivots without progress before the least-index rule takes over

# --- cautions -------------------------------------------------------------------------------------------------------

# Steady touch limits, IEC 62368-1:2018 Table 4, from memory: below ES1 nothing is felt that hurts, above ES2 it may kill.
# The alternating ones hold up to 1 kHz and are kept above it, on the safe side.
ES1_PEAK_V = 42.4
ES2_PEAK_V = 70.7
ES1_DIRECT_V = 60.0
ES2_DIRECT_V = 120.0
# Charge of a touchable capacitor, IEC 60335-1 clause 8.1.4 as quoted in a public forum thread (looked up): 45 µC, which is
# also 0.1 µF at 450 V.
TOUCH_CHARGE_C = 45e-6
# Capacitors from 100 V and 10 J on: shock; below 100 V from 100 J on: burns. Electrical safety manual of a national
# laboratory (LBNL), tables 2.2.13 and 2.3.5, looked up. The 10 J are taken for magnetic fields too: common practice, no source.
SHOCK_CAPACITOR_V = 100.0
SHOCK_ENERGY_J = 10.0
THERMAL_ENERGY_J = 100.0
# What counts as a current transformer that stands open: turns ratio, coupling and burden. Common practice, no source.
CURRENT_TRANSFORMER_RATIO = 10.0
CURRENT_TRANSFORMER_COUPLING = 0.9
CURRENT_TRANSFORMER_BURDEN_OHM = 10e3

# --- service: workers and front -------------------------------------------------------------------------------------
WORKER_OOM_SCORE_ADJUST = 700  # the kernel, short of memory, takes a worker and not the server
WORKER_RESPAWN_PAUSE_S = 0.2  # between tries to start a process when the system has none to give
IDLE_LOOK_S = 0.5  # how soon a worker that died without work is replaced
WORKER_LEAVE_S = 0.3  # a stopping server waits so long for its workers; they see its end by themselves
INLINE_ANSWER_BYTES = 64 * 1024  # below this a file costs more than the pipe (measured: 0.4 ms against 0.3 ms)
MAX_REQUEST_BYTES = 4 * 2**20  # what every gRPC library sends and takes unasked; larger arrays go through PutArray
MAX_ARRAY_PART_BYTES = 2**20  # one part of an array: the chunk size at which Python streams fastest
MAX_SIZE_HEADER_BYTES = 64  # five varints and their keys
DEFAULT_QUEUE_PER_WORKER = 4  # waiting calls a worker: with calls of a second, nobody waits longer than a few
DEFAULT_MAX_TIMEOUT_S = 600.0  # no call may hold a worker longer; batches are for that
DEFAULT_MEMORY_SHARE = (
    0.5  # of the machine's memory for all calls together; the rest is for whoever else is on the node
)
WORKER_BASE_ADDRESS_BYTES = (
    2 * 2**30
)  # address space of an idle worker (libraries, arenas), before its share of the budget
DEFAULT_ARRAY_STORE_BYTES = 512 * 2**20  # uploaded and fetched arrays together; the least recently used leave first
ARRAY_UPLOAD_IDLE_S = 600.0  # an upload nobody continues is forgotten
MAX_OPEN_UPLOADS = 64  # unfinished uploads at a time; the longest idle leaves first
SPOOL_FULL_RETRY_S = 2.0  # a full spool empties as answers are read
MAX_WINDINGS = 4000  # a dense set of this size is 128 MB a matrix and some minutes of eigenvalues
RETRY_AFTER_FLOOR_S = 0.1  # shortest wait asked of a refused caller
RETRY_AFTER_CEILING_S = 5.0  # longest wait asked of a refused caller; load changes faster than that
DEFAULT_GRACE_S = 10.0  # a drain waits so long for running calls, below the 30 s service supervisors allow
HANDSHAKE_TIMEOUT_MS = 5_000  # a connection that says nothing is closed
MAX_CONNECTION_AGE_MS = 1_800_000  # after that a client connects anew, and so finds servers that were added
MAX_CONNECTION_IDLE_MS = 300_000  # a connection without calls is closed; clients reconnect by themselves
KEEPALIVE_MIN_INTERVAL_MS = 30_000  # the client pings every 60 s while it has calls; twice as often is tolerated
MAX_CONCURRENT_STREAMS = 256  # calls a connection may have open at once
CALL_MEAN_WEIGHT = 0.1  # weight of the newest call in the running mean of call seconds
FIRST_CALL_S = 1.0  # what a call is taken to last before any was measured
ESTIMATE_MATRICES = (
    6  # dense complex copies a solve holds at once: matrix, factor, right sides, scratch, two of headroom
)
UNSTATED_BYTES = 64 * 2**20  # what a request may cost beyond its stated size: enough to type small ones by hand
ESTIMATE_COPIES = 4  # copies of a request in flight: received, piped, parsed, decoded
LOG_QUEUE_LINES = 10_000  # lines that may wait for a slow reader of stderr; later ones are counted and dropped
TOKEN_RELOAD_INTERVAL_S = 1.0  # how often the token file is looked at, at most
PROGRESS_INTERVAL_S = 0.1  # progress is for eyes; more often it only costs
HEALTH_INTERVAL_S = 0.5  # how soon health tells that no worker can be had
PARENT_POLL_S = 0.2  # how often an embedded server looks whether its parent lives

# --- batches --------------------------------------------------------------------------------------------------------
BATCH_GROUP_COMMIT_COUNT = 256  # writes in one transaction: one sync of the disk serves them all
BATCH_CHUNK_TRIES = 2  # a chunk whose worker died is tried once more, then split
BATCH_SPLIT = 8  # parts a poisoned chunk falls into: four splits single out one row of 4096
BATCH_STORE_RETRY_S = 2.0  # before the state folder is tried again once it could not be written to
BATCH_EXPIRE_EVERY_S = 60.0  # between two looks for batches whose time has come; retention is told in days
BATCH_OPEN_COUNT = 8  # batches whose submitted numbers stay open: more run in turns rarely
BATCH_PATIENCE_S = 60.0  # a chunk is never thought stuck before: a loaded machine may be ten times slower
BATCH_PATIENCE_FACTOR = 50.0  # nor before so many times what it was forecast to take
BATCH_LOOK_EVERY_S = 5.0  # between two looks for stuck chunks
BATCH_PROVE_COUNT = 64  # newest result files read whole after a restart: what a disk may hold back unwritten
BATCH_VARIANT_LIMIT = 1_000_000  # variants in one batch: its columns then stay within some tens of megabytes
BATCH_POINT_LIMIT = 200_000  # points of a row: the grid still fits one message
BATCH_CHUNK_ROWS = 4096  # most variants computed at a time
BATCH_CHUNK_BYTES = 4 * 2**20  # numbers of a chunk: the front proves and streams it in a few milliseconds
BATCH_CHUNK_S = 0.5  # work of a chunk: what an interactive call may have to wait for, and a stop may throw away
BATCH_FORECAST_ROWS = (8, 64, 512)  # variants tried for the forecast, each while the one before was quick
BATCH_FORECAST_POINTS = 64  # points of a heavy variant tried for the forecast
BATCH_FORECAST_S = 0.3  # what is no longer quick: the caller waits for the forecast
OUTPUT_GRID_SHARE = 1e-6  # of a step: the end of a grid may be off by so much
WORKER_BASE_BYTES = 100 * 2**20  # resident memory of an idle worker: interpreter, NumPy, SciPy
BATCH_SUMMARY_BYTES = 64 * 2**20  # numbers a summary holds at a time
BATCH_SUMMARY_ROWS = 10_000  # extreme rows named at each end: beyond, stream the rows themselves
BATCH_PAGE_SIZE = 100  # batches a page, when the caller does not say
BATCH_PAGE_LIMIT = 1000  # batches a page at most: some hundred kilobytes
