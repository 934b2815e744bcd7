from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import finding_pb2 as _finding_pb2
from interwind.v1 import network_pb2 as _network_pb2
from interwind.v1 import observable_pb2 as _observable_pb2
from interwind.v1 import response_pb2 as _response_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class StampNetworkRequest(_message.Message):
    __slots__ = ("size", "network")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ...) -> None: ...

class StampNetworkResponse(_message.Message):
    __slots__ = ("conductance_matrix", "storage_matrix", "input_matrix", "unknowns", "inputs", "findings", "cautions", "evidence")
    CONDUCTANCE_MATRIX_FIELD_NUMBER: _ClassVar[int]
    STORAGE_MATRIX_FIELD_NUMBER: _ClassVar[int]
    INPUT_MATRIX_FIELD_NUMBER: _ClassVar[int]
    UNKNOWNS_FIELD_NUMBER: _ClassVar[int]
    INPUTS_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    conductance_matrix: _array_pb2.Array
    storage_matrix: _array_pb2.Array
    input_matrix: _array_pb2.Array
    unknowns: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    inputs: _containers.RepeatedScalarFieldContainer[str]
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, conductance_matrix: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., storage_matrix: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., input_matrix: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., unknowns: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., inputs: _Optional[_Iterable[str]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...
