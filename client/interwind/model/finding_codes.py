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

_NETWORK = {
    "ISOLATED_PART": FindingCode(
        "A part of the network has no conducting path to the reference; its voltages count from a node of its own.",
        "Nothing, when the isolation is meant; name its zero in references to choose another node.",
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

FINDING_CODES = MappingProxyType({**_WINDINGS, **_NETWORK})
