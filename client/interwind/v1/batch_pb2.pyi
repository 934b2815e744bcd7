from google.protobuf import timestamp_pb2 as _timestamp_pb2
from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import observable_pb2 as _observable_pb2
from interwind.v1 import reading_pb2 as _reading_pb2
from interwind.v1 import response_pb2 as _response_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class BatchState(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    BATCH_STATE_UNSPECIFIED: _ClassVar[BatchState]
    BATCH_STATE_WAITING: _ClassVar[BatchState]
    BATCH_STATE_RUNNING: _ClassVar[BatchState]
    BATCH_STATE_DONE: _ClassVar[BatchState]
    BATCH_STATE_CANCELLED: _ClassVar[BatchState]

class VariantStatus(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    VARIANT_STATUS_UNSPECIFIED: _ClassVar[VariantStatus]
    VARIANT_STATUS_OK: _ClassVar[VariantStatus]
    VARIANT_STATUS_INVALID: _ClassVar[VariantStatus]
    VARIANT_STATUS_FAILED: _ClassVar[VariantStatus]
    VARIANT_STATUS_CANCELLED: _ClassVar[VariantStatus]

class SampleParameter(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    SAMPLE_PARAMETER_UNSPECIFIED: _ClassVar[SampleParameter]
    SAMPLE_PARAMETER_LEAKAGE: _ClassVar[SampleParameter]
    SAMPLE_PARAMETER_FACTOR: _ClassVar[SampleParameter]
BATCH_STATE_UNSPECIFIED: BatchState
BATCH_STATE_WAITING: BatchState
BATCH_STATE_RUNNING: BatchState
BATCH_STATE_DONE: BatchState
BATCH_STATE_CANCELLED: BatchState
VARIANT_STATUS_UNSPECIFIED: VariantStatus
VARIANT_STATUS_OK: VariantStatus
VARIANT_STATUS_INVALID: VariantStatus
VARIANT_STATUS_FAILED: VariantStatus
VARIANT_STATUS_CANCELLED: VariantStatus
SAMPLE_PARAMETER_UNSPECIFIED: SampleParameter
SAMPLE_PARAMETER_LEAKAGE: SampleParameter
SAMPLE_PARAMETER_FACTOR: SampleParameter

class OverrideColumn(_message.Message):
    __slots__ = ("vary", "coupling", "inductance", "matrix", "sample", "readings")
    VARY_FIELD_NUMBER: _ClassVar[int]
    COUPLING_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_FIELD_NUMBER: _ClassVar[int]
    MATRIX_FIELD_NUMBER: _ClassVar[int]
    SAMPLE_FIELD_NUMBER: _ClassVar[int]
    READINGS_FIELD_NUMBER: _ClassVar[int]
    vary: Vary
    coupling: VaryCoupling
    inductance: VaryInductance
    matrix: VaryMatrix
    sample: SampleWindings
    readings: VaryReadings
    def __init__(self, vary: _Optional[_Union[Vary, _Mapping]] = ..., coupling: _Optional[_Union[VaryCoupling, _Mapping]] = ..., inductance: _Optional[_Union[VaryInductance, _Mapping]] = ..., matrix: _Optional[_Union[VaryMatrix, _Mapping]] = ..., sample: _Optional[_Union[SampleWindings, _Mapping]] = ..., readings: _Optional[_Union[VaryReadings, _Mapping]] = ...) -> None: ...

class Vary(_message.Message):
    __slots__ = ("element", "field", "values")
    ELEMENT_FIELD_NUMBER: _ClassVar[int]
    FIELD_FIELD_NUMBER: _ClassVar[int]
    VALUES_FIELD_NUMBER: _ClassVar[int]
    element: str
    field: str
    values: _array_pb2.Array
    def __init__(self, element: _Optional[str] = ..., field: _Optional[str] = ..., values: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class VaryCoupling(_message.Message):
    __slots__ = ("windings_name", "label_a", "label_b", "values")
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    LABEL_A_FIELD_NUMBER: _ClassVar[int]
    LABEL_B_FIELD_NUMBER: _ClassVar[int]
    VALUES_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    label_a: str
    label_b: str
    values: _array_pb2.Array
    def __init__(self, windings_name: _Optional[str] = ..., label_a: _Optional[str] = ..., label_b: _Optional[str] = ..., values: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class VaryInductance(_message.Message):
    __slots__ = ("windings_name", "label_a", "label_b", "values_h")
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    LABEL_A_FIELD_NUMBER: _ClassVar[int]
    LABEL_B_FIELD_NUMBER: _ClassVar[int]
    VALUES_H_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    label_a: str
    label_b: str
    values_h: _array_pb2.Array
    def __init__(self, windings_name: _Optional[str] = ..., label_a: _Optional[str] = ..., label_b: _Optional[str] = ..., values_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class VaryMatrix(_message.Message):
    __slots__ = ("windings_name", "inductance_h")
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    inductance_h: _array_pb2.Array
    def __init__(self, windings_name: _Optional[str] = ..., inductance_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class VaryReadings(_message.Message):
    __slots__ = ("windings_name", "readings", "values")
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    READINGS_FIELD_NUMBER: _ClassVar[int]
    VALUES_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    readings: _containers.RepeatedCompositeFieldContainer[_reading_pb2.Reading]
    values: _array_pb2.Array
    def __init__(self, windings_name: _Optional[str] = ..., readings: _Optional[_Iterable[_Union[_reading_pb2.Reading, _Mapping]]] = ..., values: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class SampleWindings(_message.Message):
    __slots__ = ("windings_name", "variant_count", "spread", "self_spread", "parameter", "seed")
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    VARIANT_COUNT_FIELD_NUMBER: _ClassVar[int]
    SPREAD_FIELD_NUMBER: _ClassVar[int]
    SELF_SPREAD_FIELD_NUMBER: _ClassVar[int]
    PARAMETER_FIELD_NUMBER: _ClassVar[int]
    SEED_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    variant_count: int
    spread: float
    self_spread: float
    parameter: SampleParameter
    seed: int
    def __init__(self, windings_name: _Optional[str] = ..., variant_count: _Optional[int] = ..., spread: _Optional[float] = ..., self_spread: _Optional[float] = ..., parameter: _Optional[_Union[SampleParameter, str]] = ..., seed: _Optional[int] = ...) -> None: ...

class FrequencyAnalysis(_message.Message):
    __slots__ = ("frequency_hz", "observe")
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    frequency_hz: _array_pb2.Array
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    def __init__(self, frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ...) -> None: ...

class TimeAnalysis(_message.Message):
    __slots__ = ("stop_s", "step_s", "observe", "initial", "steady_start", "tolerance")
    STOP_S_FIELD_NUMBER: _ClassVar[int]
    STEP_S_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    INITIAL_FIELD_NUMBER: _ClassVar[int]
    STEADY_START_FIELD_NUMBER: _ClassVar[int]
    TOLERANCE_FIELD_NUMBER: _ClassVar[int]
    stop_s: float
    step_s: float
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    initial: _containers.RepeatedCompositeFieldContainer[_response_pb2.InitialValue]
    steady_start: bool
    tolerance: float
    def __init__(self, stop_s: _Optional[float] = ..., step_s: _Optional[float] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., initial: _Optional[_Iterable[_Union[_response_pb2.InitialValue, _Mapping]]] = ..., steady_start: bool = ..., tolerance: _Optional[float] = ...) -> None: ...

class PeriodicAnalysis(_message.Message):
    __slots__ = ("period_s", "step_s", "observe", "tolerance")
    PERIOD_S_FIELD_NUMBER: _ClassVar[int]
    STEP_S_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    TOLERANCE_FIELD_NUMBER: _ClassVar[int]
    period_s: float
    step_s: float
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    tolerance: float
    def __init__(self, period_s: _Optional[float] = ..., step_s: _Optional[float] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., tolerance: _Optional[float] = ...) -> None: ...

class CheckAnalysis(_message.Message):
    __slots__ = ("windings_name",)
    WINDINGS_NAME_FIELD_NUMBER: _ClassVar[int]
    windings_name: str
    def __init__(self, windings_name: _Optional[str] = ...) -> None: ...

class CostForecast(_message.Message):
    __slots__ = ("duration_s", "result_bytes", "memory_bytes", "chunk_count")
    DURATION_S_FIELD_NUMBER: _ClassVar[int]
    RESULT_BYTES_FIELD_NUMBER: _ClassVar[int]
    MEMORY_BYTES_FIELD_NUMBER: _ClassVar[int]
    CHUNK_COUNT_FIELD_NUMBER: _ClassVar[int]
    duration_s: float
    result_bytes: int
    memory_bytes: int
    chunk_count: int
    def __init__(self, duration_s: _Optional[float] = ..., result_bytes: _Optional[int] = ..., memory_bytes: _Optional[int] = ..., chunk_count: _Optional[int] = ...) -> None: ...

class Batch(_message.Message):
    __slots__ = ("batch_id", "state", "done", "variant_count", "ok_count", "invalid_count", "failed_count", "cancelled_count", "sequence", "request_id", "create_time", "done_time", "expire_time", "forecast", "held_reason")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    STATE_FIELD_NUMBER: _ClassVar[int]
    DONE_FIELD_NUMBER: _ClassVar[int]
    VARIANT_COUNT_FIELD_NUMBER: _ClassVar[int]
    OK_COUNT_FIELD_NUMBER: _ClassVar[int]
    INVALID_COUNT_FIELD_NUMBER: _ClassVar[int]
    FAILED_COUNT_FIELD_NUMBER: _ClassVar[int]
    CANCELLED_COUNT_FIELD_NUMBER: _ClassVar[int]
    SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    REQUEST_ID_FIELD_NUMBER: _ClassVar[int]
    CREATE_TIME_FIELD_NUMBER: _ClassVar[int]
    DONE_TIME_FIELD_NUMBER: _ClassVar[int]
    EXPIRE_TIME_FIELD_NUMBER: _ClassVar[int]
    FORECAST_FIELD_NUMBER: _ClassVar[int]
    HELD_REASON_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    state: BatchState
    done: bool
    variant_count: int
    ok_count: int
    invalid_count: int
    failed_count: int
    cancelled_count: int
    sequence: int
    request_id: str
    create_time: _timestamp_pb2.Timestamp
    done_time: _timestamp_pb2.Timestamp
    expire_time: _timestamp_pb2.Timestamp
    forecast: CostForecast
    held_reason: str
    def __init__(self, batch_id: _Optional[str] = ..., state: _Optional[_Union[BatchState, str]] = ..., done: bool = ..., variant_count: _Optional[int] = ..., ok_count: _Optional[int] = ..., invalid_count: _Optional[int] = ..., failed_count: _Optional[int] = ..., cancelled_count: _Optional[int] = ..., sequence: _Optional[int] = ..., request_id: _Optional[str] = ..., create_time: _Optional[_Union[_timestamp_pb2.Timestamp, _Mapping]] = ..., done_time: _Optional[_Union[_timestamp_pb2.Timestamp, _Mapping]] = ..., expire_time: _Optional[_Union[_timestamp_pb2.Timestamp, _Mapping]] = ..., forecast: _Optional[_Union[CostForecast, _Mapping]] = ..., held_reason: _Optional[str] = ...) -> None: ...
