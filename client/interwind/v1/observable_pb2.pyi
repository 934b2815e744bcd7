from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Observable(_message.Message):
    __slots__ = ("node_voltage", "element_voltage", "element_current", "winding_voltage", "winding_current", "flux_linkage", "element_power", "stored_energy")
    NODE_VOLTAGE_FIELD_NUMBER: _ClassVar[int]
    ELEMENT_VOLTAGE_FIELD_NUMBER: _ClassVar[int]
    ELEMENT_CURRENT_FIELD_NUMBER: _ClassVar[int]
    WINDING_VOLTAGE_FIELD_NUMBER: _ClassVar[int]
    WINDING_CURRENT_FIELD_NUMBER: _ClassVar[int]
    FLUX_LINKAGE_FIELD_NUMBER: _ClassVar[int]
    ELEMENT_POWER_FIELD_NUMBER: _ClassVar[int]
    STORED_ENERGY_FIELD_NUMBER: _ClassVar[int]
    node_voltage: NodeVoltage
    element_voltage: str
    element_current: str
    winding_voltage: WindingName
    winding_current: WindingName
    flux_linkage: WindingName
    element_power: str
    stored_energy: str
    def __init__(self, node_voltage: _Optional[_Union[NodeVoltage, _Mapping]] = ..., element_voltage: _Optional[str] = ..., element_current: _Optional[str] = ..., winding_voltage: _Optional[_Union[WindingName, _Mapping]] = ..., winding_current: _Optional[_Union[WindingName, _Mapping]] = ..., flux_linkage: _Optional[_Union[WindingName, _Mapping]] = ..., element_power: _Optional[str] = ..., stored_energy: _Optional[str] = ...) -> None: ...

class NodeVoltage(_message.Message):
    __slots__ = ("node", "to")
    NODE_FIELD_NUMBER: _ClassVar[int]
    TO_FIELD_NUMBER: _ClassVar[int]
    node: str
    to: str
    def __init__(self, node: _Optional[str] = ..., to: _Optional[str] = ...) -> None: ...

class WindingName(_message.Message):
    __slots__ = ("name", "label")
    NAME_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    name: str
    label: str
    def __init__(self, name: _Optional[str] = ..., label: _Optional[str] = ...) -> None: ...
