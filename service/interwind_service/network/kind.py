"""What a branch of a numbered network can be."""

from enum import IntEnum


class Kind(IntEnum):
    """What a branch is."""

    RESISTOR = 0
    INDUCTOR = 1
    CAPACITOR = 2
    VOLTAGE_SOURCE = 3
    CURRENT_SOURCE = 4
    WINDING = 5
    SWITCH = 6
    DIODE = 7
    ARRESTER = 8
    SATURABLE = 9
    TRANSFORMER = 10
    CONTROLLED_VOLTAGE = 11
    CONTROLLED_CURRENT = 12
