from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class ReadingForm(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    READING_FORM_UNSPECIFIED: _ClassVar[ReadingForm]
    READING_FORM_SERIES: _ClassVar[ReadingForm]
    READING_FORM_PARALLEL: _ClassVar[ReadingForm]
READING_FORM_UNSPECIFIED: ReadingForm
READING_FORM_SERIES: ReadingForm
READING_FORM_PARALLEL: ReadingForm

class Reading(_message.Message):
    __slots__ = ("open_inductance", "shorted_inductance", "series_inductance", "voltage_ratio", "mutual_inductance", "pair_leakage", "effective_leakage", "inverse_inductance")
    OPEN_INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    SHORTED_INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    SERIES_INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    VOLTAGE_RATIO_FIELD_NUMBER: _ClassVar[int]
    MUTUAL_INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    PAIR_LEAKAGE_FIELD_NUMBER: _ClassVar[int]
    EFFECTIVE_LEAKAGE_FIELD_NUMBER: _ClassVar[int]
    INVERSE_INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    open_inductance: OpenInductance
    shorted_inductance: ShortedInductance
    series_inductance: SeriesInductance
    voltage_ratio: VoltageRatio
    mutual_inductance: MutualInductance
    pair_leakage: PairLeakage
    effective_leakage: EffectiveLeakage
    inverse_inductance: InverseInductance
    def __init__(self, open_inductance: _Optional[_Union[OpenInductance, _Mapping]] = ..., shorted_inductance: _Optional[_Union[ShortedInductance, _Mapping]] = ..., series_inductance: _Optional[_Union[SeriesInductance, _Mapping]] = ..., voltage_ratio: _Optional[_Union[VoltageRatio, _Mapping]] = ..., mutual_inductance: _Optional[_Union[MutualInductance, _Mapping]] = ..., pair_leakage: _Optional[_Union[PairLeakage, _Mapping]] = ..., effective_leakage: _Optional[_Union[EffectiveLeakage, _Mapping]] = ..., inverse_inductance: _Optional[_Union[InverseInductance, _Mapping]] = ...) -> None: ...

class ReadingContext(_message.Message):
    __slots__ = ("frequency_hz", "form", "quality_factor", "parallel_capacitance_f", "shorted_resistance_ohm")
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    FORM_FIELD_NUMBER: _ClassVar[int]
    QUALITY_FACTOR_FIELD_NUMBER: _ClassVar[int]
    PARALLEL_CAPACITANCE_F_FIELD_NUMBER: _ClassVar[int]
    SHORTED_RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    frequency_hz: float
    form: ReadingForm
    quality_factor: float
    parallel_capacitance_f: float
    shorted_resistance_ohm: _containers.RepeatedScalarFieldContainer[float]
    def __init__(self, frequency_hz: _Optional[float] = ..., form: _Optional[_Union[ReadingForm, str]] = ..., quality_factor: _Optional[float] = ..., parallel_capacitance_f: _Optional[float] = ..., shorted_resistance_ohm: _Optional[_Iterable[float]] = ...) -> None: ...

class OpenInductance(_message.Message):
    __slots__ = ("winding", "inductance_h", "uncertainty_h", "context")
    WINDING_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    CONTEXT_FIELD_NUMBER: _ClassVar[int]
    winding: str
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext
    def __init__(self, winding: _Optional[str] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ..., context: _Optional[_Union[ReadingContext, _Mapping]] = ...) -> None: ...

class ShortedInductance(_message.Message):
    __slots__ = ("winding", "shorted", "inductance_h", "uncertainty_h", "context")
    WINDING_FIELD_NUMBER: _ClassVar[int]
    SHORTED_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    CONTEXT_FIELD_NUMBER: _ClassVar[int]
    winding: str
    shorted: _containers.RepeatedScalarFieldContainer[str]
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext
    def __init__(self, winding: _Optional[str] = ..., shorted: _Optional[_Iterable[str]] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ..., context: _Optional[_Union[ReadingContext, _Mapping]] = ...) -> None: ...

class SeriesInductance(_message.Message):
    __slots__ = ("windings", "aiding", "inductance_h", "uncertainty_h", "context")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    AIDING_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    CONTEXT_FIELD_NUMBER: _ClassVar[int]
    windings: _containers.RepeatedScalarFieldContainer[str]
    aiding: _containers.RepeatedScalarFieldContainer[bool]
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext
    def __init__(self, windings: _Optional[_Iterable[str]] = ..., aiding: _Optional[_Iterable[bool]] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ..., context: _Optional[_Union[ReadingContext, _Mapping]] = ...) -> None: ...

class VoltageRatio(_message.Message):
    __slots__ = ("driven", "measured", "ratio", "uncertainty")
    DRIVEN_FIELD_NUMBER: _ClassVar[int]
    MEASURED_FIELD_NUMBER: _ClassVar[int]
    RATIO_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_FIELD_NUMBER: _ClassVar[int]
    driven: str
    measured: str
    ratio: float
    uncertainty: float
    def __init__(self, driven: _Optional[str] = ..., measured: _Optional[str] = ..., ratio: _Optional[float] = ..., uncertainty: _Optional[float] = ...) -> None: ...

class MutualInductance(_message.Message):
    __slots__ = ("first", "second", "inductance_h", "uncertainty_h")
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    first: str
    second: str
    inductance_h: float
    uncertainty_h: float
    def __init__(self, first: _Optional[str] = ..., second: _Optional[str] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ...) -> None: ...

class PairLeakage(_message.Message):
    __slots__ = ("first", "second", "first_turn_count", "second_turn_count", "inductance_h", "uncertainty_h")
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    FIRST_TURN_COUNT_FIELD_NUMBER: _ClassVar[int]
    SECOND_TURN_COUNT_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    first: str
    second: str
    first_turn_count: float
    second_turn_count: float
    inductance_h: float
    uncertainty_h: float
    def __init__(self, first: _Optional[str] = ..., second: _Optional[str] = ..., first_turn_count: _Optional[float] = ..., second_turn_count: _Optional[float] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ...) -> None: ...

class EffectiveLeakage(_message.Message):
    __slots__ = ("reference", "first", "second", "inductance_h", "uncertainty_h")
    REFERENCE_FIELD_NUMBER: _ClassVar[int]
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    reference: str
    first: str
    second: str
    inductance_h: float
    uncertainty_h: float
    def __init__(self, reference: _Optional[str] = ..., first: _Optional[str] = ..., second: _Optional[str] = ..., inductance_h: _Optional[float] = ..., uncertainty_h: _Optional[float] = ...) -> None: ...

class InverseInductance(_message.Message):
    __slots__ = ("first", "second", "inverse_inductance_per_h", "uncertainty_per_h")
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    INVERSE_INDUCTANCE_PER_H_FIELD_NUMBER: _ClassVar[int]
    UNCERTAINTY_PER_H_FIELD_NUMBER: _ClassVar[int]
    first: str
    second: str
    inverse_inductance_per_h: float
    uncertainty_per_h: float
    def __init__(self, first: _Optional[str] = ..., second: _Optional[str] = ..., inverse_inductance_per_h: _Optional[float] = ..., uncertainty_per_h: _Optional[float] = ...) -> None: ...
