from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import finding_pb2 as _finding_pb2
from interwind.v1 import response_pb2 as _response_pb2
from interwind.v1 import windings_pb2 as _windings_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Verdict(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    VERDICT_UNSPECIFIED: _ClassVar[Verdict]
    VERDICT_VALID: _ClassVar[Verdict]
    VERDICT_INVALID: _ClassVar[Verdict]
    VERDICT_UNDECIDED: _ClassVar[Verdict]
VERDICT_UNSPECIFIED: Verdict
VERDICT_VALID: Verdict
VERDICT_INVALID: Verdict
VERDICT_UNDECIDED: Verdict

class CheckWindingsRequest(_message.Message):
    __slots__ = ("size", "windings")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    windings: _windings_pb2.WindingSet
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ...) -> None: ...

class CheckWindingsResponse(_message.Message):
    __slots__ = ("verdict", "labels", "eigenvalues", "eigenvalues_h", "witness_current_a", "witness_energy_j", "culprits", "feasible_low", "feasible_high", "findings", "cautions", "evidence")
    VERDICT_FIELD_NUMBER: _ClassVar[int]
    LABELS_FIELD_NUMBER: _ClassVar[int]
    EIGENVALUES_FIELD_NUMBER: _ClassVar[int]
    EIGENVALUES_H_FIELD_NUMBER: _ClassVar[int]
    WITNESS_CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    WITNESS_ENERGY_J_FIELD_NUMBER: _ClassVar[int]
    CULPRITS_FIELD_NUMBER: _ClassVar[int]
    FEASIBLE_LOW_FIELD_NUMBER: _ClassVar[int]
    FEASIBLE_HIGH_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    verdict: Verdict
    labels: _containers.RepeatedScalarFieldContainer[str]
    eigenvalues: _array_pb2.Array
    eigenvalues_h: _array_pb2.Array
    witness_current_a: _array_pb2.Array
    witness_energy_j: float
    culprits: _containers.RepeatedCompositeFieldContainer[Culprit]
    feasible_low: _array_pb2.Array
    feasible_high: _array_pb2.Array
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, verdict: _Optional[_Union[Verdict, str]] = ..., labels: _Optional[_Iterable[str]] = ..., eigenvalues: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., eigenvalues_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., witness_current_a: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., witness_energy_j: _Optional[float] = ..., culprits: _Optional[_Iterable[_Union[Culprit, _Mapping]]] = ..., feasible_low: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., feasible_high: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class Culprit(_message.Message):
    __slots__ = ("first", "second", "low", "high", "suggested")
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    LOW_FIELD_NUMBER: _ClassVar[int]
    HIGH_FIELD_NUMBER: _ClassVar[int]
    SUGGESTED_FIELD_NUMBER: _ClassVar[int]
    first: str
    second: str
    low: float
    high: float
    suggested: float
    def __init__(self, first: _Optional[str] = ..., second: _Optional[str] = ..., low: _Optional[float] = ..., high: _Optional[float] = ..., suggested: _Optional[float] = ...) -> None: ...
