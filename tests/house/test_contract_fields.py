"""The contract reads without its authors: every part is commented, every quantity carries its unit in its name."""

from __future__ import annotations

import importlib
import pkgutil
import re

import interwind.v1

UNITS = ("h", "ohm", "f", "hz", "s", "v", "a", "j", "w", "wb", "rad", "db", "h2", "per_h", "per_s", "bytes", "count")

# Quantities without a unit of their own. Left: the message; right: its fields.
UNITLESS = {
    # Values and phasors take the unit of their source, V or A.
    "Phasor": {"real", "imaginary"},
    "Constant": {"value"},
    "Step": {"value"},
    "Sine": {"amplitude", "offset"},
    "Trapezoid": {"low", "high"},
    "DoubleExponential": {"amplitude"},
    "PiecewiseLinear": {"value"},
    "SampledRecord": {"value"},
    "StandardImpulse": {"peak"},
    "DampedSine": {"amplitude"},
    "OffsetFaultCurrent": {"amplitude"},
    "DoubleList": {"values"},
    "InitialValue": {"value"},
    # Couplings, ratios, gains, scattering and exponents have none.
    "WindingSet": {"coupling_uncertainty"},
    "VaryCoupling": {"values"},
    "VaryReadings": {"values"},
    "EquivalentCircuit": {"turns_ratio", "leakage_error"},
    "VoltageRatio": {"ratio", "uncertainty"},
    "RepairWindingsRequest": {"weights", "floor"},
    "RepairWindingsResponse": {"distance"},
    "CouplingChange": {"before", "after", "change_in_uncertainties"},
    "CouplingForm": {"coupling"},
    "IdealTransformer": {"turns_ratio"},
    "VoltageByVoltage": {"gain"},
    "CurrentByCurrent": {"gain"},
    "Arrester": {"exponent"},
    "Culprit": {"low", "high", "suggested"},
    "CheckWindingsResponse": {"eigenvalues", "feasible_low", "feasible_high", "margin", "blame"},
    # The matrices of a stamped network mix units by row and column.
    "StampNetworkResponse": {"conductance_matrix", "storage_matrix", "input_matrix"},
    # These hold the unit of the field they vary, or of the points they list.
    "Vary": {"values"},
    "BatchResultHeader": {"points"},
    # Shares, statistics and relative figures.
    "Modes": {"energy_share"},
    "CurrentSharing": {"share", "direct_share", "inductive_share"},
    "ReadingContext": {"quality_factor"},
    "IdentifyWindingsResponse": {"chi_square", "residuals"},
    "Outlier": {"residual"},
    "SampleWindings": {"spread", "self_spread"},
    "SummarizeBatchRequest": {"quantile_levels"},
    "TimeAnalysis": {"tolerance"},
    "PeriodicAnalysis": {"tolerance"},
    "ComputeTimeResponseRequest": {"tolerance"},
    "ComputePeriodicResponseRequest": {"tolerance"},
    "ComputePortFiguresResponse": {"samples"},
    "ComputePolesResponse": {"quality_factor", "residue", "participation"},
    "Evidence": {"residual", "condition", "reciprocity_error", "passivity_margin", "energy_error"},
    # The message tells the unit.
    "Finding": {"measured", "limit"},
    "Caution": {"measured", "threshold"},
}


def messages():
    """Every message of the contract."""
    for found in pkgutil.iter_modules(interwind.v1.__path__):
        if found.name.endswith("_pb2"):
            module = importlib.import_module(f"interwind.v1.{found.name}")
            yield from module.DESCRIPTOR.message_types_by_name.values()


def is_quantity(field) -> bool:
    """Whether a field is a number with a unit: a double, an Array, or a map to doubles."""
    kind = field.message_type
    if kind is not None and kind.GetOptions().map_entry:
        return is_quantity(kind.fields_by_name["value"])
    return field.type == field.TYPE_DOUBLE or (kind is not None and kind.name == "Array")


def test_every_quantity_ends_in_its_unit():
    """A double or an array says its unit in its name, but for those listed here with the reason."""
    offenders = [
        f"{message.name}.{field.name}"
        for message in messages()
        for field in message.fields
        if is_quantity(field)
        and not any(field.name.endswith(f"_{unit}") for unit in UNITS)
        and field.name not in UNITLESS.get(message.name, ())
    ]
    assert [] == offenders


def test_no_exception_is_stale():
    """The list of exceptions names fields that exist."""
    fields = {message.name: {field.name for field in message.fields} for message in messages()}
    assert {} == {name: left for name, listed in UNITLESS.items() if (left := listed - fields.get(name, set()))}


def test_every_part_is_commented(root):
    """Every message, field, enum, value, service and call stands under a comment that begins like a sentence."""
    declaration = re.compile(
        r"\s*(message|enum|service|rpc|oneof|(repeated |optional )?[\w.<>, ]+ \w+ = \d+|[A-Z0-9_]+ = \d+)\b"
    )
    silent = []
    for path in sorted((root / "proto/interwind/v1").glob("*.proto")):
        lines = path.read_text(encoding="utf-8").splitlines()
        for number, line in enumerate(lines):
            if declaration.match(line) and not lines[number - 1].lstrip().startswith("//"):
                silent.append(f"{path.name}:{number + 1}: {line.strip()}")
    assert [] == silent


def test_henry_and_farad_are_spelled_out(root):
    """Field names are lower case, so the comment of an `_h` or `_f` says henry or farad somewhere in its file."""
    for path in sorted((root / "proto/interwind/v1").glob("*.proto")):
        text = path.read_text(encoding="utf-8")
        for suffix, word in (("_h", "henry"), ("_f", "farad")):
            fields = re.findall(rf"(\w+{suffix}) = \d+;", text)
            assert not fields or word in text, f"{path.name}: {fields} need the word {word} in their comment"
