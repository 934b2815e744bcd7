from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import finding_pb2 as _finding_pb2
from interwind.v1 import observable_pb2 as _observable_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Size(_message.Message):
    __slots__ = ("winding_count", "unknown_count", "point_count", "observable_count", "variant_count", "coupling_count")
    WINDING_COUNT_FIELD_NUMBER: _ClassVar[int]
    UNKNOWN_COUNT_FIELD_NUMBER: _ClassVar[int]
    POINT_COUNT_FIELD_NUMBER: _ClassVar[int]
    OBSERVABLE_COUNT_FIELD_NUMBER: _ClassVar[int]
    VARIANT_COUNT_FIELD_NUMBER: _ClassVar[int]
    COUPLING_COUNT_FIELD_NUMBER: _ClassVar[int]
    winding_count: int
    unknown_count: int
    point_count: int
    observable_count: int
    variant_count: int
    coupling_count: int
    def __init__(self, winding_count: _Optional[int] = ..., unknown_count: _Optional[int] = ..., point_count: _Optional[int] = ..., observable_count: _Optional[int] = ..., variant_count: _Optional[int] = ..., coupling_count: _Optional[int] = ...) -> None: ...

class Progress(_message.Message):
    __slots__ = ("done_count", "total_count")
    DONE_COUNT_FIELD_NUMBER: _ClassVar[int]
    TOTAL_COUNT_FIELD_NUMBER: _ClassVar[int]
    done_count: int
    total_count: int
    def __init__(self, done_count: _Optional[int] = ..., total_count: _Optional[int] = ...) -> None: ...

class ResultHeader(_message.Message):
    __slots__ = ("arrays",)
    ARRAYS_FIELD_NUMBER: _ClassVar[int]
    arrays: _containers.RepeatedCompositeFieldContainer[ResultArray]
    def __init__(self, arrays: _Optional[_Iterable[_Union[ResultArray, _Mapping]]] = ...) -> None: ...

class ResultArray(_message.Message):
    __slots__ = ("name", "shape", "dtype", "columns", "port_names")
    NAME_FIELD_NUMBER: _ClassVar[int]
    SHAPE_FIELD_NUMBER: _ClassVar[int]
    DTYPE_FIELD_NUMBER: _ClassVar[int]
    COLUMNS_FIELD_NUMBER: _ClassVar[int]
    PORT_NAMES_FIELD_NUMBER: _ClassVar[int]
    name: str
    shape: _containers.RepeatedScalarFieldContainer[int]
    dtype: _array_pb2.Dtype
    columns: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    port_names: _containers.RepeatedScalarFieldContainer[str]
    def __init__(self, name: _Optional[str] = ..., shape: _Optional[_Iterable[int]] = ..., dtype: _Optional[_Union[_array_pb2.Dtype, str]] = ..., columns: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., port_names: _Optional[_Iterable[str]] = ...) -> None: ...

class ResultChunk(_message.Message):
    __slots__ = ("offset_bytes", "data")
    OFFSET_BYTES_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    offset_bytes: int
    data: bytes
    def __init__(self, offset_bytes: _Optional[int] = ..., data: _Optional[bytes] = ...) -> None: ...

class ResultTrailer(_message.Message):
    __slots__ = ("evidence", "findings", "cautions", "size_bytes", "sha256", "events", "ledger", "mean_power_w", "period_s")
    class MeanPowerWEntry(_message.Message):
        __slots__ = ("key", "value")
        KEY_FIELD_NUMBER: _ClassVar[int]
        VALUE_FIELD_NUMBER: _ClassVar[int]
        key: str
        value: float
        def __init__(self, key: _Optional[str] = ..., value: _Optional[float] = ...) -> None: ...
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    SIZE_BYTES_FIELD_NUMBER: _ClassVar[int]
    SHA256_FIELD_NUMBER: _ClassVar[int]
    EVENTS_FIELD_NUMBER: _ClassVar[int]
    LEDGER_FIELD_NUMBER: _ClassVar[int]
    MEAN_POWER_W_FIELD_NUMBER: _ClassVar[int]
    PERIOD_S_FIELD_NUMBER: _ClassVar[int]
    evidence: _finding_pb2.Evidence
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    size_bytes: int
    sha256: str
    events: _containers.RepeatedCompositeFieldContainer[Event]
    ledger: EnergyLedger
    mean_power_w: _containers.ScalarMap[str, float]
    period_s: float
    def __init__(self, evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., size_bytes: _Optional[int] = ..., sha256: _Optional[str] = ..., events: _Optional[_Iterable[_Union[Event, _Mapping]]] = ..., ledger: _Optional[_Union[EnergyLedger, _Mapping]] = ..., mean_power_w: _Optional[_Mapping[str, float]] = ..., period_s: _Optional[float] = ...) -> None: ...

class Event(_message.Message):
    __slots__ = ("time_s", "element", "state")
    TIME_S_FIELD_NUMBER: _ClassVar[int]
    ELEMENT_FIELD_NUMBER: _ClassVar[int]
    STATE_FIELD_NUMBER: _ClassVar[int]
    time_s: float
    element: str
    state: str
    def __init__(self, time_s: _Optional[float] = ..., element: _Optional[str] = ..., state: _Optional[str] = ...) -> None: ...

class EnergyLedger(_message.Message):
    __slots__ = ("supplied_j", "dissipated_j", "stored_change_j", "lost_in_jumps_j", "numerical_j", "dissipated_by_element_j")
    class DissipatedByElementJEntry(_message.Message):
        __slots__ = ("key", "value")
        KEY_FIELD_NUMBER: _ClassVar[int]
        VALUE_FIELD_NUMBER: _ClassVar[int]
        key: str
        value: float
        def __init__(self, key: _Optional[str] = ..., value: _Optional[float] = ...) -> None: ...
    SUPPLIED_J_FIELD_NUMBER: _ClassVar[int]
    DISSIPATED_J_FIELD_NUMBER: _ClassVar[int]
    STORED_CHANGE_J_FIELD_NUMBER: _ClassVar[int]
    LOST_IN_JUMPS_J_FIELD_NUMBER: _ClassVar[int]
    NUMERICAL_J_FIELD_NUMBER: _ClassVar[int]
    DISSIPATED_BY_ELEMENT_J_FIELD_NUMBER: _ClassVar[int]
    supplied_j: float
    dissipated_j: float
    stored_change_j: float
    lost_in_jumps_j: float
    numerical_j: float
    dissipated_by_element_j: _containers.ScalarMap[str, float]
    def __init__(self, supplied_j: _Optional[float] = ..., dissipated_j: _Optional[float] = ..., stored_change_j: _Optional[float] = ..., lost_in_jumps_j: _Optional[float] = ..., numerical_j: _Optional[float] = ..., dissipated_by_element_j: _Optional[_Mapping[str, float]] = ...) -> None: ...

class InitialValue(_message.Message):
    __slots__ = ("observable", "value")
    OBSERVABLE_FIELD_NUMBER: _ClassVar[int]
    VALUE_FIELD_NUMBER: _ClassVar[int]
    observable: _observable_pb2.Observable
    value: float
    def __init__(self, observable: _Optional[_Union[_observable_pb2.Observable, _Mapping]] = ..., value: _Optional[float] = ...) -> None: ...
