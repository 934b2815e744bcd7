from interwind.v1 import array_pb2 as _array_pb2
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class ImpulseShape(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    IMPULSE_SHAPE_UNSPECIFIED: _ClassVar[ImpulseShape]
    IMPULSE_SHAPE_LIGHTNING_1_2_50: _ClassVar[ImpulseShape]
    IMPULSE_SHAPE_SWITCHING_250_2500: _ClassVar[ImpulseShape]
    IMPULSE_SHAPE_CURRENT_8_20: _ClassVar[ImpulseShape]
    IMPULSE_SHAPE_SURGE_10_1000: _ClassVar[ImpulseShape]
    IMPULSE_SHAPE_RING_100_KHZ: _ClassVar[ImpulseShape]
IMPULSE_SHAPE_UNSPECIFIED: ImpulseShape
IMPULSE_SHAPE_LIGHTNING_1_2_50: ImpulseShape
IMPULSE_SHAPE_SWITCHING_250_2500: ImpulseShape
IMPULSE_SHAPE_CURRENT_8_20: ImpulseShape
IMPULSE_SHAPE_SURGE_10_1000: ImpulseShape
IMPULSE_SHAPE_RING_100_KHZ: ImpulseShape

class Waveform(_message.Message):
    __slots__ = ("constant", "step", "ramp", "sine", "trapezoid", "double_exponential", "piecewise_linear", "standard_impulse", "damped_sine", "offset_fault_current", "sampled_record")
    CONSTANT_FIELD_NUMBER: _ClassVar[int]
    STEP_FIELD_NUMBER: _ClassVar[int]
    RAMP_FIELD_NUMBER: _ClassVar[int]
    SINE_FIELD_NUMBER: _ClassVar[int]
    TRAPEZOID_FIELD_NUMBER: _ClassVar[int]
    DOUBLE_EXPONENTIAL_FIELD_NUMBER: _ClassVar[int]
    PIECEWISE_LINEAR_FIELD_NUMBER: _ClassVar[int]
    STANDARD_IMPULSE_FIELD_NUMBER: _ClassVar[int]
    DAMPED_SINE_FIELD_NUMBER: _ClassVar[int]
    OFFSET_FAULT_CURRENT_FIELD_NUMBER: _ClassVar[int]
    SAMPLED_RECORD_FIELD_NUMBER: _ClassVar[int]
    constant: Constant
    step: Step
    ramp: Ramp
    sine: Sine
    trapezoid: Trapezoid
    double_exponential: DoubleExponential
    piecewise_linear: PiecewiseLinear
    standard_impulse: StandardImpulse
    damped_sine: DampedSine
    offset_fault_current: OffsetFaultCurrent
    sampled_record: SampledRecord
    def __init__(self, constant: _Optional[_Union[Constant, _Mapping]] = ..., step: _Optional[_Union[Step, _Mapping]] = ..., ramp: _Optional[_Union[Ramp, _Mapping]] = ..., sine: _Optional[_Union[Sine, _Mapping]] = ..., trapezoid: _Optional[_Union[Trapezoid, _Mapping]] = ..., double_exponential: _Optional[_Union[DoubleExponential, _Mapping]] = ..., piecewise_linear: _Optional[_Union[PiecewiseLinear, _Mapping]] = ..., standard_impulse: _Optional[_Union[StandardImpulse, _Mapping]] = ..., damped_sine: _Optional[_Union[DampedSine, _Mapping]] = ..., offset_fault_current: _Optional[_Union[OffsetFaultCurrent, _Mapping]] = ..., sampled_record: _Optional[_Union[SampledRecord, _Mapping]] = ...) -> None: ...

class Constant(_message.Message):
    __slots__ = ("value",)
    VALUE_FIELD_NUMBER: _ClassVar[int]
    value: float
    def __init__(self, value: _Optional[float] = ...) -> None: ...

class Step(_message.Message):
    __slots__ = ("value", "at_s")
    VALUE_FIELD_NUMBER: _ClassVar[int]
    AT_S_FIELD_NUMBER: _ClassVar[int]
    value: float
    at_s: float
    def __init__(self, value: _Optional[float] = ..., at_s: _Optional[float] = ...) -> None: ...

class Ramp(_message.Message):
    __slots__ = ("slope_per_s", "at_s")
    SLOPE_PER_S_FIELD_NUMBER: _ClassVar[int]
    AT_S_FIELD_NUMBER: _ClassVar[int]
    slope_per_s: float
    at_s: float
    def __init__(self, slope_per_s: _Optional[float] = ..., at_s: _Optional[float] = ...) -> None: ...

class Sine(_message.Message):
    __slots__ = ("amplitude", "frequency_hz", "phase_rad", "offset")
    AMPLITUDE_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    PHASE_RAD_FIELD_NUMBER: _ClassVar[int]
    OFFSET_FIELD_NUMBER: _ClassVar[int]
    amplitude: float
    frequency_hz: float
    phase_rad: float
    offset: float
    def __init__(self, amplitude: _Optional[float] = ..., frequency_hz: _Optional[float] = ..., phase_rad: _Optional[float] = ..., offset: _Optional[float] = ...) -> None: ...

class Trapezoid(_message.Message):
    __slots__ = ("low", "high", "period_s", "rise_s", "high_s", "fall_s", "delay_s")
    LOW_FIELD_NUMBER: _ClassVar[int]
    HIGH_FIELD_NUMBER: _ClassVar[int]
    PERIOD_S_FIELD_NUMBER: _ClassVar[int]
    RISE_S_FIELD_NUMBER: _ClassVar[int]
    HIGH_S_FIELD_NUMBER: _ClassVar[int]
    FALL_S_FIELD_NUMBER: _ClassVar[int]
    DELAY_S_FIELD_NUMBER: _ClassVar[int]
    low: float
    high: float
    period_s: float
    rise_s: float
    high_s: float
    fall_s: float
    delay_s: float
    def __init__(self, low: _Optional[float] = ..., high: _Optional[float] = ..., period_s: _Optional[float] = ..., rise_s: _Optional[float] = ..., high_s: _Optional[float] = ..., fall_s: _Optional[float] = ..., delay_s: _Optional[float] = ...) -> None: ...

class DoubleExponential(_message.Message):
    __slots__ = ("amplitude", "tail_s", "front_s")
    AMPLITUDE_FIELD_NUMBER: _ClassVar[int]
    TAIL_S_FIELD_NUMBER: _ClassVar[int]
    FRONT_S_FIELD_NUMBER: _ClassVar[int]
    amplitude: float
    tail_s: float
    front_s: float
    def __init__(self, amplitude: _Optional[float] = ..., tail_s: _Optional[float] = ..., front_s: _Optional[float] = ...) -> None: ...

class PiecewiseLinear(_message.Message):
    __slots__ = ("time_s", "value")
    TIME_S_FIELD_NUMBER: _ClassVar[int]
    VALUE_FIELD_NUMBER: _ClassVar[int]
    time_s: _array_pb2.Array
    value: _array_pb2.Array
    def __init__(self, time_s: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., value: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class StandardImpulse(_message.Message):
    __slots__ = ("shape", "peak", "chopped_at_s", "collapse_s")
    SHAPE_FIELD_NUMBER: _ClassVar[int]
    PEAK_FIELD_NUMBER: _ClassVar[int]
    CHOPPED_AT_S_FIELD_NUMBER: _ClassVar[int]
    COLLAPSE_S_FIELD_NUMBER: _ClassVar[int]
    shape: ImpulseShape
    peak: float
    chopped_at_s: float
    collapse_s: float
    def __init__(self, shape: _Optional[_Union[ImpulseShape, str]] = ..., peak: _Optional[float] = ..., chopped_at_s: _Optional[float] = ..., collapse_s: _Optional[float] = ...) -> None: ...

class DampedSine(_message.Message):
    __slots__ = ("amplitude", "frequency_hz", "decay_s", "phase_rad")
    AMPLITUDE_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    DECAY_S_FIELD_NUMBER: _ClassVar[int]
    PHASE_RAD_FIELD_NUMBER: _ClassVar[int]
    amplitude: float
    frequency_hz: float
    decay_s: float
    phase_rad: float
    def __init__(self, amplitude: _Optional[float] = ..., frequency_hz: _Optional[float] = ..., decay_s: _Optional[float] = ..., phase_rad: _Optional[float] = ...) -> None: ...

class OffsetFaultCurrent(_message.Message):
    __slots__ = ("amplitude", "frequency_hz", "decay_s", "phase_rad")
    AMPLITUDE_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    DECAY_S_FIELD_NUMBER: _ClassVar[int]
    PHASE_RAD_FIELD_NUMBER: _ClassVar[int]
    amplitude: float
    frequency_hz: float
    decay_s: float
    phase_rad: float
    def __init__(self, amplitude: _Optional[float] = ..., frequency_hz: _Optional[float] = ..., decay_s: _Optional[float] = ..., phase_rad: _Optional[float] = ...) -> None: ...

class SampledRecord(_message.Message):
    __slots__ = ("interval_s", "value", "start_s")
    INTERVAL_S_FIELD_NUMBER: _ClassVar[int]
    VALUE_FIELD_NUMBER: _ClassVar[int]
    START_S_FIELD_NUMBER: _ClassVar[int]
    interval_s: float
    value: _array_pb2.Array
    start_s: float
    def __init__(self, interval_s: _Optional[float] = ..., value: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., start_s: _Optional[float] = ...) -> None: ...
