"""The catalogue of finding codes: what each says in one sentence, and the cure. Codes are stable and only added to."""

from __future__ import annotations

from dataclasses import dataclass
from types import MappingProxyType


@dataclass(frozen=True, slots=True)
class FindingCode:
    """What a finding code means, and what to do about it."""

    meaning: str
    cure: str


_WINDINGS = {
    "NON_POSITIVE_SELF_INDUCTANCE": FindingCode(
        "A self-inductance is zero or negative, which no winding has.",
        "Measure the winding again with all others open, and check the unit and the sign of the entry.",
    ),
    "ASYMMETRIC": FindingCode(
        "The two entries of a pair differ by more than the stated noise explains; reciprocity wants them equal.",
        "Find out which of the two was misread, or state the uncertainty of the entries.",
    ),
    "HALF_STATED_PAIR": FindingCode(
        "A pair is given on one side of the diagonal only; the value that is given is used.",
        "Write the value on both sides, or NaN on both sides when the pair is not known.",
    ),
    "COUPLING_ABOVE_ONE": FindingCode(
        "The magnitude of a coupling exceeds 1 by more than its stated band, so the pair alone is impossible.",
        "Measure the mutual or the leakage inductance of that pair again, away from resonance.",
    ),
    "INDEFINITE": FindingCode(
        "The smallest eigenvalue of the coupling matrix is negative by more than the stated band explains.",
        "Look at the culprits: measure the first one again, or mend the set with repair.",
    ),
    "WITHIN_UNCERTAINTY": FindingCode(
        "The smallest eigenvalue is closer to zero than the stated band can move it, so the data do not decide.",
        "State more digits, or measure leakage inductances instead of couplings.",
    ),
    "PERFECT_COUPLING": FindingCode(
        "The coupling matrix is singular within rounding: some combination of the windings has no leakage at all.",
        "Nothing, when perfect coupling is meant as an idealisation; otherwise state couplings with more digits.",
    ),
    "NEARLY_PERFECT_COUPLING": FindingCode(
        "The smallest eigenvalue is positive, but so small that the set is semidefinite within tolerance.",
        "Nothing, when the data are exact; otherwise measure leakage inductances instead of couplings.",
    ),
    "UNKNOWN_PAIR": FindingCode(
        "A coupling is not known; it is not taken as zero, and a solve needs it filled.",
        "Measure the pair, or fill it with repair: the interval it must lie in is in the report.",
    ),
    "NO_VALID_COMPLETION": FindingCode(
        "No values of the unknown couplings make the set possible; the fault is among the known ones.",
        "Look at the culprits among the known pairs and measure the first one again.",
    ),
    "COMPLETION_NOT_SEARCHED": FindingCode(
        "There are too many unknown pairs in too loose a pattern to decide whether a valid completion exists.",
        "State more pairs, or judge a smaller part of the set.",
    ),
    "INTERVALS_HELD_AT_COMPLETION": FindingCode(
        "The feasible intervals hold the other unknown couplings at one completion, so they may be too narrow.",
        "State more pairs, or judge a smaller part of the set, where the intervals cover every completion.",
    ),
    "CULPRIT_PAIR": FindingCode(
        "Changing this one coupling alone makes the set possible.",
        "Measure that pair again by a short-circuit test; the interval it must lie in is given.",
    ),
    "NO_SINGLE_CHANGE_CURES": FindingCode(
        "No change of a single coupling makes the set possible: at least two entries are wrong.",
        "Check the windings of the smallest impossible subsets, starting with the one blamed most.",
    ),
    "CULPRITS_TRUNCATED": FindingCode(
        "More single changes would cure than are listed.",
        "Read the remaining ones off the feasible intervals.",
    ),
    "CULPRIT_WINDING": FindingCode(
        "No single pair cures, but leaving this winding out does: several of its couplings are wrong.",
        "Measure the couplings of that winding again, or look for a unit or a turns ratio that slipped for it.",
    ),
    "IMPOSSIBLE_SUBSET": FindingCode(
        "These few windings alone cannot exist together, so the fault is among their couplings.",
        "Measure the pairs of this subset again, starting with one that stands in several impossible subsets.",
    ),
    "SUBSETS_TRUNCATED": FindingCode(
        "More subsets of windings are impossible than are named.",
        "Mend the first ones and check again.",
    ),
    "SIGN_FLIPPED": FindingCode(
        "The set would be possible with the sign of this pair turned, alone or together with the others named.",
        "Check the dots of the two windings by an aiding and an opposing series reading.",
    ),
    "FACTOR_TWO": FindingCode(
        "Twice or half the value of this pair would be possible; the value given is not.",
        "Look for a mutual inductance counted once instead of twice, or a winding half measured.",
    ),
    "UNIT_SLIP": FindingCode(
        "The value times a power of a thousand would be possible, or as tightly coupled as all others.",
        "Check the unit of that entry; the value that would fit is given.",
    ),
    "OTHER_SIDE": FindingCode(
        "The leakage of a pair differs from the others by the ratio of the self-inductances.",
        "Find out from which winding it was measured and refer it to that side; the coupling that would fit is given.",
    ),
    "UNLIKELY_MAGNITUDE": FindingCode(
        "A self-inductance lies where no winding does, or further from all others than any turns ratio.",
        "Check its unit; the value that would fit is given.",
    ),
    "LEAKAGE_DIGITS": FindingCode(
        "The digits or the uncertainty of a coupling leave its leakage inductance too uncertain to design with.",
        "Measure the leakage inductance itself, or state the coupling with the decimals named.",
    ),
    "DUPLICATE_WINDINGS": FindingCode(
        "Two windings agree in every entry.",
        "Leave one out if the same conductor was entered twice; otherwise nothing.",
    ),
    "REVERSAL_NOT_SHOWN": FindingCode(
        "A whole winding entered the wrong way round cannot be seen in couplings.",
        "Take an aiding and an opposing series reading of each winding against one other.",
    ),
    "REFERRAL_NOT_SHOWN": FindingCode(
        "A leakage referred to the wrong side of a turns ratio usually leaves the set possible.",
        "Check against a short-circuit reading that names its driven winding.",
    ),
    "NO_UNCERTAINTY_STATED": FindingCode(
        "No uncertainty is stated, so the verdict allows for rounding only.",
        "State the printed decimals, or standard deviations, of the couplings or of the inductances.",
    ),
    "NEGATIVE_RESISTANCE": FindingCode(
        "A winding resistance is negative: the winding would deliver power.",
        "Check the sign of the entry and the subtraction of the leads.",
    ),
    "RESISTANCE_ASYMMETRIC": FindingCode(
        "The resistance matrix is not symmetric; reciprocity wants it to be.",
        "Find out which of the two entries was misread.",
    ),
    "RESISTANCE_NOT_POSITIVE_SEMIDEFINITE": FindingCode(
        "The resistance matrix is indefinite: some set of currents would deliver power instead of losing it.",
        "Check the mutual resistances of the windings named; none may exceed the geometric mean of the two own ones.",
    ),
}

_REPAIR = {
    "NOTHING_TO_REPAIR": FindingCode(
        "The set can exist as it stands, so nothing was changed.",
        "Nothing; if a value still looks wrong, check says what these data cannot show.",
    ),
    "PAIR_DISTRUSTED": FindingCode(
        "One pair contradicts the others; it was set to the value of largest determinant and the rest left alone.",
        "Measure that pair again by a short-circuit test, and put the reading in its place.",
    ),
    "PAIR_COMPLETED": FindingCode(
        "A pair was not known and took the value of largest determinant that the known pairs speak for.",
        "Measure the pair when a leakage depends on it; its feasible interval tells how much is left open.",
    ),
    "COMPLETED_WITHOUT_EVIDENCE": FindingCode(
        "No chain of known pairs links the two windings; zero is the completion, but nothing speaks for it.",
        "Measure the pair.",
    ),
    "CHANGE_BEYOND_UNCERTAINTY": FindingCode(
        "The repair moved a coupling by more than two of its stated deviations.",
        "Measure that pair again; the stated uncertainty or the value is wrong.",
    ),
    "LEAKAGE_MOVED": FindingCode(
        "The repair changed a leakage by more than a tenth.",
        "Compare the leakage with a short-circuit test before using the repaired set.",
    ),
    "FLOOR_DECIDES_LEAKAGE": FindingCode(
        "The nearest set lies on the edge of what is possible: an all-shorted leakage follows from the floor alone.",
        "Prefer COMPLETION, raise the floor to what physics assures, or measure the leakage.",
    ),
}

_READINGS = {
    "READING_CORRECTED": FindingCode(
        "A reading was cleaned of capacitance, parallel form or the resistance of the short before it was used.",
        "Read again inside the usable window named, when the correction matters.",
    ),
    "POLARITY_NOT_READ": FindingCode(
        "No reading links the polarity of some windings; their starts are taken for the dotted ends.",
        "Take one series reading, aiding against opposing, or one voltage ratio with its sign.",
    ),
    "OUTLIER": FindingCode(
        "One reading contradicts the others by more than chance explains.",
        "Take the reading again; the message names the slip that would explain it, when there is one.",
    ),
    "READINGS_CONTRADICT": FindingCode(
        "The readings contradict each other and nothing tells which of them is wrong.",
        "Take one of the readings named again, or one more of the same windings; or state larger uncertainties.",
    ),
    "READINGS_IMPOSSIBLE": FindingCode(
        "No windings that can exist show these readings within their uncertainties.",
        "Take the reading named again.",
    ),
    "NEXT_READING": FindingCode(
        "The reading to take next, with the value to expect.",
        "Take it and identify again with all readings.",
    ),
}

_CHARACTER = {
    "CONNECTIONS_WITHOUT_LOSS": FindingCode(
        "Connections use the high-frequency inductance and the direct-current resistance of what they join.",
        "Ask for the sharing over frequency, or put the windings into a network, where the loss matters.",
    ),
    "UNCERTAINTY_NOT_CARRIED": FindingCode(
        "The stated uncertainty is not carried through connections.",
        "Characterize the windings as they are for error bars.",
    ),
    "EQUIVALENTS_LEFT_OUT": FindingCode(
        "There are too many windings for equivalent circuits that anybody reads.",
        "Join or leave out windings, or use the matrix.",
    ),
    "EQUIVALENT_NOT_THERE": FindingCode(
        "A star or cantilever circuit would divide by a mutual inductance of zero, or needs signs that agree.",
        "Use another circuit or the matrix.",
    ),
    "NEGATIVE_LEG": FindingCode(
        "A branch of an equivalent circuit is negative; the terminals still behave as they should.",
        "Nothing, but hang no other element on the inner end of that branch.",
    ),
    "STAR_IS_A_FIT": FindingCode(
        "More than three windings have more pairs than a star has legs; the star only fits their leakages.",
        "Use the cantilever circuit or the matrix.",
    ),
}

_NETWORK = {
    "MODES_WITHIN_BANDWIDTH": FindingCode(
        "Two natural modes lie closer together than their own bandwidth, so one peak may show both.",
        "Nothing; read their poles, residues and participation to tell them apart.",
    ),
    "ADAPTIVE_PEAK_ERROR": FindingCode(
        "How far the highest peak error of an adaptive sweep is below its tolerance.",
        "Nothing; ask for a smaller tolerance_db when peaks are wanted more exactly.",
    ),
    "ISOLATED_PART": FindingCode(
        "A part of the network has no conducting path to the reference; its voltages count from a node of its own.",
        "Nothing, when the isolation is meant; name its zero in references to choose another node.",
    ),
    "INCONSISTENT_START": FindingCode(
        "The state given for t = 0 contradicts the network; charge and flux are kept, and what jumps is named.",
        "Nothing, when the jump is meant; else state values that fit, or start at rest with SteadyStart.",
    ),
    "FIGURE_UNDETERMINED": FindingCode(
        "A figure of the ports does not exist, or has lost its digits, at some frequencies; there it is NaN.",
        "Drive and measure at places that are joined, and give a lossless link the losses it has.",
    ),
    "SINGULAR_AT_FREQUENCY": FindingCode(
        "At this frequency the network has no unique solution; the row is NaN.",
        "Give the elements named the losses they have, or leave the frequency out.",
    ),
    "UNDEFINED_POTENTIAL": FindingCode(
        "Ideal open switches or blocked diodes leave a node without any path; its voltage is NaN.",
        "Give the switch the leakage it has, or put a large resistor across it.",
    ),
    "UNDETERMINED_CURRENT": FindingCode(
        "Elements without resistance close a loop, so nothing decides how they share the current; it is NaN.",
        "Give one of the elements named the resistance it has.",
    ),
}

_PERIODIC = {
    "OFFSET_UNDETERMINED": FindingCode(
        "A lossless loop keeps any constant current or voltage, so nothing decides the offset; none is shown.",
        "Give the loop the resistance it has.",
    ),
    "UNSTABLE_PERIODIC_STATE": FindingCode(
        "A Floquet multiplier exceeds 1: the state repeats, but the smallest disturbance leads away from it.",
        "Run the network in time to see where it goes, and close the loop that is missing, such as a control.",
    ),
    "NEARLY_UNDAMPED": FindingCode(
        "A disturbance decays by less than a ten-thousandth in a period.",
        "Nothing, when such a slow decay is meant; else give the network the losses it has.",
    ),
    "NEAR_PERIOD_DOUBLING": FindingCode(
        "A real Floquet multiplier is close to -1, where the state begins to repeat only after two periods.",
        "Vary the drive a little and see whether the state still repeats every period.",
    ),
    "SEVERAL_PERIODIC_STATES": FindingCode(
        "Another start of the search led to a different periodic state.",
        "Run the network in time from the start that is meant; the state shown is the one reached from rest.",
    ),
}

FINDING_CODES = MappingProxyType({**_WINDINGS, **_REPAIR, **_READINGS, **_CHARACTER, **_NETWORK, **_PERIODIC})
