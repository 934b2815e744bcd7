from interwind.v1 import array_pb2 as _array_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class EquivalentKind(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    EQUIVALENT_KIND_UNSPECIFIED: _ClassVar[EquivalentKind]
    EQUIVALENT_KIND_T: _ClassVar[EquivalentKind]
    EQUIVALENT_KIND_PI: _ClassVar[EquivalentKind]
    EQUIVALENT_KIND_STAR: _ClassVar[EquivalentKind]
    EQUIVALENT_KIND_CANTILEVER: _ClassVar[EquivalentKind]
EQUIVALENT_KIND_UNSPECIFIED: EquivalentKind
EQUIVALENT_KIND_T: EquivalentKind
EQUIVALENT_KIND_PI: EquivalentKind
EQUIVALENT_KIND_STAR: EquivalentKind
EQUIVALENT_KIND_CANTILEVER: EquivalentKind

class Connection(_message.Message):
    __slots__ = ("in_series", "in_parallel", "shorted", "open")
    IN_SERIES_FIELD_NUMBER: _ClassVar[int]
    IN_PARALLEL_FIELD_NUMBER: _ClassVar[int]
    SHORTED_FIELD_NUMBER: _ClassVar[int]
    OPEN_FIELD_NUMBER: _ClassVar[int]
    in_series: JoinedWindings
    in_parallel: JoinedWindings
    shorted: str
    open: str
    def __init__(self, in_series: _Optional[_Union[JoinedWindings, _Mapping]] = ..., in_parallel: _Optional[_Union[JoinedWindings, _Mapping]] = ..., shorted: _Optional[str] = ..., open: _Optional[str] = ...) -> None: ...

class JoinedWindings(_message.Message):
    __slots__ = ("label", "windings", "aiding")
    LABEL_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    AIDING_FIELD_NUMBER: _ClassVar[int]
    label: str
    windings: _containers.RepeatedScalarFieldContainer[str]
    aiding: _containers.RepeatedScalarFieldContainer[bool]
    def __init__(self, label: _Optional[str] = ..., windings: _Optional[_Iterable[str]] = ..., aiding: _Optional[_Iterable[bool]] = ...) -> None: ...

class Modes(_message.Message):
    __slots__ = ("inductance_h", "current_a", "energy_share", "time_constant_s", "decay_current_a")
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    ENERGY_SHARE_FIELD_NUMBER: _ClassVar[int]
    TIME_CONSTANT_S_FIELD_NUMBER: _ClassVar[int]
    DECAY_CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    inductance_h: _array_pb2.Array
    current_a: _array_pb2.Array
    energy_share: _array_pb2.Array
    time_constant_s: _array_pb2.Array
    decay_current_a: _array_pb2.Array
    def __init__(self, inductance_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., current_a: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., energy_share: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., time_constant_s: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., decay_current_a: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class EquivalentCircuit(_message.Message):
    __slots__ = ("kind", "reference", "turns_ratio", "branches", "leakage_error")
    KIND_FIELD_NUMBER: _ClassVar[int]
    REFERENCE_FIELD_NUMBER: _ClassVar[int]
    TURNS_RATIO_FIELD_NUMBER: _ClassVar[int]
    BRANCHES_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_ERROR_FIELD_NUMBER: _ClassVar[int]
    kind: EquivalentKind
    reference: str
    turns_ratio: _array_pb2.Array
    branches: _containers.RepeatedCompositeFieldContainer[EquivalentBranch]
    leakage_error: _array_pb2.Array
    def __init__(self, kind: _Optional[_Union[EquivalentKind, str]] = ..., reference: _Optional[str] = ..., turns_ratio: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., branches: _Optional[_Iterable[_Union[EquivalentBranch, _Mapping]]] = ..., leakage_error: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class EquivalentBranch(_message.Message):
    __slots__ = ("windings", "inductance_h")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    windings: _containers.RepeatedScalarFieldContainer[str]
    inductance_h: float
    def __init__(self, windings: _Optional[_Iterable[str]] = ..., inductance_h: _Optional[float] = ...) -> None: ...

class CurrentSharing(_message.Message):
    __slots__ = ("label", "windings", "frequency_hz", "share", "direct_share", "inductive_share")
    LABEL_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    SHARE_FIELD_NUMBER: _ClassVar[int]
    DIRECT_SHARE_FIELD_NUMBER: _ClassVar[int]
    INDUCTIVE_SHARE_FIELD_NUMBER: _ClassVar[int]
    label: str
    windings: _containers.RepeatedScalarFieldContainer[str]
    frequency_hz: _array_pb2.Array
    share: _array_pb2.Array
    direct_share: _array_pb2.Array
    inductive_share: _array_pb2.Array
    def __init__(self, label: _Optional[str] = ..., windings: _Optional[_Iterable[str]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., share: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., direct_share: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., inductive_share: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...
