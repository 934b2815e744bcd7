from interwind.v1 import array_pb2 as _array_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class WindingSet(_message.Message):
    __slots__ = ("labels", "inductance_h", "coupling_form", "resistance_ohm", "coupling_decimal_count", "coupling_uncertainty", "inductance_uncertainty_h")
    LABELS_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    COUPLING_FORM_FIELD_NUMBER: _ClassVar[int]
    RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    COUPLING_DECIMAL_COUNT_FIELD_NUMBER: _ClassVar[int]
    COUPLING_UNCERTAINTY_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    labels: _containers.RepeatedScalarFieldContainer[str]
    inductance_h: _array_pb2.Array
    coupling_form: CouplingForm
    resistance_ohm: _array_pb2.Array
    coupling_decimal_count: int
    coupling_uncertainty: _array_pb2.Array
    inductance_uncertainty_h: _array_pb2.Array
    def __init__(self, labels: _Optional[_Iterable[str]] = ..., inductance_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., coupling_form: _Optional[_Union[CouplingForm, _Mapping]] = ..., resistance_ohm: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., coupling_decimal_count: _Optional[int] = ..., coupling_uncertainty: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., inductance_uncertainty_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class CouplingForm(_message.Message):
    __slots__ = ("self_inductance_h", "coupling")
    SELF_INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    COUPLING_FIELD_NUMBER: _ClassVar[int]
    self_inductance_h: _array_pb2.Array
    coupling: _array_pb2.Array
    def __init__(self, self_inductance_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., coupling: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...
