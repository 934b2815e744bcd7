"""The real server with test doubles in the engine: what a call does is written in the labels of its windings.

Runs as a program; every worker imports it again, so the doubles are in place there too.
"""

import os
import sys
import time

import numpy as np

from interwind.errors import FieldViolation, InvalidWindings
from interwind.model.finding import Verdict
from interwind.model.observables import NodeVoltage
from interwind.model.report import ValidityReport
from interwind.model.response import TimeResponse
from interwind_service import engine
from interwind_service.progress import report

real_check = engine.check


def check(windings):
    order, number = windings.labels[0], float(windings.inductance_h[0, 0])
    if order == "sleep":
        time.sleep(number)
    if order == "spin":
        end = time.monotonic() + number
        while time.monotonic() < end:
            pass
    if order == "raise":
        raise RuntimeError("secret from /etc/passwd")
    if order == "die":
        os.kill(os.getpid(), 9)
    if order == "allocate":
        np.ones(int(number))
    if order == "violations":
        raise InvalidWindings("many", violations=[FieldViolation(f"f[{k}]", "x" * 300) for k in range(10_000)])
    empty = np.zeros((0, 0))
    return ValidityReport(
        Verdict.VALID, windings.labels, np.zeros(0), np.zeros(0), np.zeros(0), float(os.getpid()), (), empty, empty
    )


def time_response(network, stop_s, step_s, observe=None, initial=None, tolerance=1e-6, recording=None):
    report(0, 2)
    count = round(stop_s / step_s) + 1
    time_s = np.arange(count) * step_s
    report(2, 2)
    return TimeResponse((NodeVoltage("a"),), np.sin(time_s)[:, None], time_s=time_s)


engine.check = check
engine.time_response = time_response

if __name__ == "__main__":
    from interwind_service.__main__ import main

    sys.exit(main())
