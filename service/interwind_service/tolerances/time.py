"""Thresholds of the time response of linear networks."""

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
# That s0 stands this much above the slowest mode of its block, so that it serves slower and faster ones of the block
# alike.
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
# A change of a drive at a grid point below this share of its largest value is rounding.
KICK_ROUNDING = 1e-15
# Kicks of a block as numbers a state: more, and stepping through costs less than one product with all of them.
WIDEST_KICKS = 6
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
# States kept during a run, to test the equations at and to take the stress of its cautions from.
TESTED_STATES = 256
# A resolvent at s0 moves undamped slow modes by eps s0: over a run of this many 1/s0 their phase is off by 2e-10.
SLOW_PHASE = 1e6
# Multiples of s0 at which reduced equations with controlled sources are held against direct solves.
DESCRIPTOR_PROOFS = (1e-2, 1e1, 1e3, 1e5)
# Growth exponent of an unstable mode over a run: e^300 squared is still a number, for the energy's sake.
LARGEST_GROWTH = 300.0
# Controlled sources: values of s, 1/s, tried for the separation of finite modes from constraints, the largest first.
DESCRIPTOR_SHIFTS = (1e16, 1e14, 1e12, 1e10, 1e8, 1e6)
# There s times an eigenvalue of the resolvent is 1 for slow modes, 0.03 for one 30 times faster than s, 0 for a
# constraint.
FINITE_MODE = 0.03
# Least ratio between the two kinds; below it no count is certain.
DESCRIPTOR_GAP = 1e2
# The constant left by the constraints is compared at s0 and so many times s0, and agrees to the rounding of a bad tree.
DESCRIPTOR_CHECK = 30.0
DESCRIPTOR_ROUNDING = 1e-6
# A block of modes is counted from its rest value beside a drive this many times slower: its Sylvester equation is then
# as well conditioned as the block itself.
REST_SEPARATION = 10.0
# Samples of one period from which peaks, and figures of powers, are taken: 4096 tell harmonics of products to 1e-7.
PERIOD_SAMPLES = 4096
# A peak is sought on so many points of a step, so many times on the best interval: to 1e-4 of a sample step.
LINEAR_PEAK_POINTS = 18
LINEAR_PEAK_ROUNDS = 3
# A direction whose multiplier is this near to 1 keeps any offset: rounding of the propagation is some 1e-14.
FREE_OFFSET = 1e-12
# What one period adds along such a direction counts as a steady gain above this share of the states.
RESONANT_GAIN = 1e-9
# Rates beyond this, 1/s, and times below its inverse are no physics, and their squares leave the range of numbers.
LARGEST_RATE = 1e30
# Largest |M| span of a matrix exponential: 160 halvings, each a matrix that is kept.
LARGEST_EXPONENT = 1e45
# Corners of one waveform within one run: 4 million take 100 MB and a few seconds.
MAX_WAVEFORM_CORNERS = 4_000_000
# Corners worked on at once: a few hundred kilobytes stay in the cache.
CORNERS_TOGETHER = 2**14
