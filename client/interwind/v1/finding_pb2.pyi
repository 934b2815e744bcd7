from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Severity(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    SEVERITY_UNSPECIFIED: _ClassVar[Severity]
    SEVERITY_INFO: _ClassVar[Severity]
    SEVERITY_WARNING: _ClassVar[Severity]
    SEVERITY_ERROR: _ClassVar[Severity]
SEVERITY_UNSPECIFIED: Severity
SEVERITY_INFO: Severity
SEVERITY_WARNING: Severity
SEVERITY_ERROR: Severity

class Finding(_message.Message):
    __slots__ = ("code", "severity", "windings", "field", "message", "measured", "limit")
    CODE_FIELD_NUMBER: _ClassVar[int]
    SEVERITY_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    FIELD_FIELD_NUMBER: _ClassVar[int]
    MESSAGE_FIELD_NUMBER: _ClassVar[int]
    MEASURED_FIELD_NUMBER: _ClassVar[int]
    LIMIT_FIELD_NUMBER: _ClassVar[int]
    code: str
    severity: Severity
    windings: _containers.RepeatedScalarFieldContainer[str]
    field: str
    message: str
    measured: float
    limit: float
    def __init__(self, code: _Optional[str] = ..., severity: _Optional[_Union[Severity, str]] = ..., windings: _Optional[_Iterable[str]] = ..., field: _Optional[str] = ..., message: _Optional[str] = ..., measured: _Optional[float] = ..., limit: _Optional[float] = ...) -> None: ...

class Caution(_message.Message):
    __slots__ = ("code", "message", "measured", "threshold")
    CODE_FIELD_NUMBER: _ClassVar[int]
    MESSAGE_FIELD_NUMBER: _ClassVar[int]
    MEASURED_FIELD_NUMBER: _ClassVar[int]
    THRESHOLD_FIELD_NUMBER: _ClassVar[int]
    code: str
    message: str
    measured: float
    threshold: float
    def __init__(self, code: _Optional[str] = ..., message: _Optional[str] = ..., measured: _Optional[float] = ..., threshold: _Optional[float] = ...) -> None: ...

class Evidence(_message.Message):
    __slots__ = ("method", "residual", "condition", "reciprocity_error", "passivity_margin", "energy_error", "period_count", "input_sha256", "service_version")
    METHOD_FIELD_NUMBER: _ClassVar[int]
    RESIDUAL_FIELD_NUMBER: _ClassVar[int]
    CONDITION_FIELD_NUMBER: _ClassVar[int]
    RECIPROCITY_ERROR_FIELD_NUMBER: _ClassVar[int]
    PASSIVITY_MARGIN_FIELD_NUMBER: _ClassVar[int]
    ENERGY_ERROR_FIELD_NUMBER: _ClassVar[int]
    PERIOD_COUNT_FIELD_NUMBER: _ClassVar[int]
    INPUT_SHA256_FIELD_NUMBER: _ClassVar[int]
    SERVICE_VERSION_FIELD_NUMBER: _ClassVar[int]
    method: str
    residual: float
    condition: float
    reciprocity_error: float
    passivity_margin: float
    energy_error: float
    period_count: int
    input_sha256: str
    service_version: str
    def __init__(self, method: _Optional[str] = ..., residual: _Optional[float] = ..., condition: _Optional[float] = ..., reciprocity_error: _Optional[float] = ..., passivity_margin: _Optional[float] = ..., energy_error: _Optional[float] = ..., period_count: _Optional[int] = ..., input_sha256: _Optional[str] = ..., service_version: _Optional[str] = ...) -> None: ...
