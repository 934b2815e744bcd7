from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import waveform_pb2 as _waveform_pb2
from interwind.v1 import windings_pb2 as _windings_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Network(_message.Message):
    __slots__ = ("reference", "elements", "ports", "references")
    REFERENCE_FIELD_NUMBER: _ClassVar[int]
    ELEMENTS_FIELD_NUMBER: _ClassVar[int]
    PORTS_FIELD_NUMBER: _ClassVar[int]
    REFERENCES_FIELD_NUMBER: _ClassVar[int]
    reference: str
    elements: _containers.RepeatedCompositeFieldContainer[Element]
    ports: _containers.RepeatedCompositeFieldContainer[Port]
    references: _containers.RepeatedScalarFieldContainer[str]
    def __init__(self, reference: _Optional[str] = ..., elements: _Optional[_Iterable[_Union[Element, _Mapping]]] = ..., ports: _Optional[_Iterable[_Union[Port, _Mapping]]] = ..., references: _Optional[_Iterable[str]] = ...) -> None: ...

class Port(_message.Message):
    __slots__ = ("name", "a", "b", "reference_ohm")
    NAME_FIELD_NUMBER: _ClassVar[int]
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    REFERENCE_OHM_FIELD_NUMBER: _ClassVar[int]
    name: str
    a: str
    b: str
    reference_ohm: float
    def __init__(self, name: _Optional[str] = ..., a: _Optional[str] = ..., b: _Optional[str] = ..., reference_ohm: _Optional[float] = ...) -> None: ...

class Element(_message.Message):
    __slots__ = ("name", "resistor", "inductor", "capacitor", "voltage_source", "current_source", "windings", "switch", "diode", "arrester", "saturable_inductor", "ideal_transformer", "voltage_by_voltage", "current_by_voltage", "voltage_by_current", "current_by_current")
    NAME_FIELD_NUMBER: _ClassVar[int]
    RESISTOR_FIELD_NUMBER: _ClassVar[int]
    INDUCTOR_FIELD_NUMBER: _ClassVar[int]
    CAPACITOR_FIELD_NUMBER: _ClassVar[int]
    VOLTAGE_SOURCE_FIELD_NUMBER: _ClassVar[int]
    CURRENT_SOURCE_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    SWITCH_FIELD_NUMBER: _ClassVar[int]
    DIODE_FIELD_NUMBER: _ClassVar[int]
    ARRESTER_FIELD_NUMBER: _ClassVar[int]
    SATURABLE_INDUCTOR_FIELD_NUMBER: _ClassVar[int]
    IDEAL_TRANSFORMER_FIELD_NUMBER: _ClassVar[int]
    VOLTAGE_BY_VOLTAGE_FIELD_NUMBER: _ClassVar[int]
    CURRENT_BY_VOLTAGE_FIELD_NUMBER: _ClassVar[int]
    VOLTAGE_BY_CURRENT_FIELD_NUMBER: _ClassVar[int]
    CURRENT_BY_CURRENT_FIELD_NUMBER: _ClassVar[int]
    name: str
    resistor: Resistor
    inductor: Inductor
    capacitor: Capacitor
    voltage_source: VoltageSource
    current_source: CurrentSource
    windings: Windings
    switch: Switch
    diode: Diode
    arrester: Arrester
    saturable_inductor: SaturableInductor
    ideal_transformer: IdealTransformer
    voltage_by_voltage: VoltageByVoltage
    current_by_voltage: CurrentByVoltage
    voltage_by_current: VoltageByCurrent
    current_by_current: CurrentByCurrent
    def __init__(self, name: _Optional[str] = ..., resistor: _Optional[_Union[Resistor, _Mapping]] = ..., inductor: _Optional[_Union[Inductor, _Mapping]] = ..., capacitor: _Optional[_Union[Capacitor, _Mapping]] = ..., voltage_source: _Optional[_Union[VoltageSource, _Mapping]] = ..., current_source: _Optional[_Union[CurrentSource, _Mapping]] = ..., windings: _Optional[_Union[Windings, _Mapping]] = ..., switch: _Optional[_Union[Switch, _Mapping]] = ..., diode: _Optional[_Union[Diode, _Mapping]] = ..., arrester: _Optional[_Union[Arrester, _Mapping]] = ..., saturable_inductor: _Optional[_Union[SaturableInductor, _Mapping]] = ..., ideal_transformer: _Optional[_Union[IdealTransformer, _Mapping]] = ..., voltage_by_voltage: _Optional[_Union[VoltageByVoltage, _Mapping]] = ..., current_by_voltage: _Optional[_Union[CurrentByVoltage, _Mapping]] = ..., voltage_by_current: _Optional[_Union[VoltageByCurrent, _Mapping]] = ..., current_by_current: _Optional[_Union[CurrentByCurrent, _Mapping]] = ...) -> None: ...

class Resistor(_message.Message):
    __slots__ = ("a", "b", "resistance_ohm")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    resistance_ohm: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., resistance_ohm: _Optional[float] = ...) -> None: ...

class Inductor(_message.Message):
    __slots__ = ("a", "b", "inductance_h")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    INDUCTANCE_H_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    inductance_h: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., inductance_h: _Optional[float] = ...) -> None: ...

class Capacitor(_message.Message):
    __slots__ = ("a", "b", "capacitance_f")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CAPACITANCE_F_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    capacitance_f: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., capacitance_f: _Optional[float] = ...) -> None: ...

class VoltageSource(_message.Message):
    __slots__ = ("a", "b", "waveform", "phasor")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    WAVEFORM_FIELD_NUMBER: _ClassVar[int]
    PHASOR_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    waveform: _waveform_pb2.Waveform
    phasor: Phasor
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., waveform: _Optional[_Union[_waveform_pb2.Waveform, _Mapping]] = ..., phasor: _Optional[_Union[Phasor, _Mapping]] = ...) -> None: ...

class CurrentSource(_message.Message):
    __slots__ = ("a", "b", "waveform", "phasor")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    WAVEFORM_FIELD_NUMBER: _ClassVar[int]
    PHASOR_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    waveform: _waveform_pb2.Waveform
    phasor: Phasor
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., waveform: _Optional[_Union[_waveform_pb2.Waveform, _Mapping]] = ..., phasor: _Optional[_Union[Phasor, _Mapping]] = ...) -> None: ...

class Phasor(_message.Message):
    __slots__ = ("real", "imaginary")
    REAL_FIELD_NUMBER: _ClassVar[int]
    IMAGINARY_FIELD_NUMBER: _ClassVar[int]
    real: float
    imaginary: float
    def __init__(self, real: _Optional[float] = ..., imaginary: _Optional[float] = ...) -> None: ...

class Windings(_message.Message):
    __slots__ = ("windings", "terminals")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    TERMINALS_FIELD_NUMBER: _ClassVar[int]
    windings: _windings_pb2.WindingSet
    terminals: _containers.RepeatedCompositeFieldContainer[WindingTerminals]
    def __init__(self, windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., terminals: _Optional[_Iterable[_Union[WindingTerminals, _Mapping]]] = ...) -> None: ...

class WindingTerminals(_message.Message):
    __slots__ = ("label", "start", "finish")
    LABEL_FIELD_NUMBER: _ClassVar[int]
    START_FIELD_NUMBER: _ClassVar[int]
    FINISH_FIELD_NUMBER: _ClassVar[int]
    label: str
    start: str
    finish: str
    def __init__(self, label: _Optional[str] = ..., start: _Optional[str] = ..., finish: _Optional[str] = ...) -> None: ...

class Switch(_message.Message):
    __slots__ = ("a", "b", "gate", "gate_times", "conducting_resistance_ohm", "blocking_resistance_ohm")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    GATE_FIELD_NUMBER: _ClassVar[int]
    GATE_TIMES_FIELD_NUMBER: _ClassVar[int]
    CONDUCTING_RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    BLOCKING_RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    gate: Gate
    gate_times: GateTimes
    conducting_resistance_ohm: float
    blocking_resistance_ohm: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., gate: _Optional[_Union[Gate, _Mapping]] = ..., gate_times: _Optional[_Union[GateTimes, _Mapping]] = ..., conducting_resistance_ohm: _Optional[float] = ..., blocking_resistance_ohm: _Optional[float] = ...) -> None: ...

class Gate(_message.Message):
    __slots__ = ("period_s", "on_s", "delay_s")
    PERIOD_S_FIELD_NUMBER: _ClassVar[int]
    ON_S_FIELD_NUMBER: _ClassVar[int]
    DELAY_S_FIELD_NUMBER: _ClassVar[int]
    period_s: float
    on_s: float
    delay_s: float
    def __init__(self, period_s: _Optional[float] = ..., on_s: _Optional[float] = ..., delay_s: _Optional[float] = ...) -> None: ...

class GateTimes(_message.Message):
    __slots__ = ("toggle_s", "initially_closed")
    TOGGLE_S_FIELD_NUMBER: _ClassVar[int]
    INITIALLY_CLOSED_FIELD_NUMBER: _ClassVar[int]
    toggle_s: _array_pb2.Array
    initially_closed: bool
    def __init__(self, toggle_s: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., initially_closed: bool = ...) -> None: ...

class Diode(_message.Message):
    __slots__ = ("anode", "cathode", "piecewise_linear", "exponential")
    ANODE_FIELD_NUMBER: _ClassVar[int]
    CATHODE_FIELD_NUMBER: _ClassVar[int]
    PIECEWISE_LINEAR_FIELD_NUMBER: _ClassVar[int]
    EXPONENTIAL_FIELD_NUMBER: _ClassVar[int]
    anode: str
    cathode: str
    piecewise_linear: PiecewiseLinearLaw
    exponential: ExponentialLaw
    def __init__(self, anode: _Optional[str] = ..., cathode: _Optional[str] = ..., piecewise_linear: _Optional[_Union[PiecewiseLinearLaw, _Mapping]] = ..., exponential: _Optional[_Union[ExponentialLaw, _Mapping]] = ...) -> None: ...

class PiecewiseLinearLaw(_message.Message):
    __slots__ = ("forward_voltage_v", "conducting_resistance_ohm", "blocking_resistance_ohm")
    FORWARD_VOLTAGE_V_FIELD_NUMBER: _ClassVar[int]
    CONDUCTING_RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    BLOCKING_RESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    forward_voltage_v: float
    conducting_resistance_ohm: float
    blocking_resistance_ohm: float
    def __init__(self, forward_voltage_v: _Optional[float] = ..., conducting_resistance_ohm: _Optional[float] = ..., blocking_resistance_ohm: _Optional[float] = ...) -> None: ...

class ExponentialLaw(_message.Message):
    __slots__ = ("saturation_current_a", "thermal_voltage_v")
    SATURATION_CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    THERMAL_VOLTAGE_V_FIELD_NUMBER: _ClassVar[int]
    saturation_current_a: float
    thermal_voltage_v: float
    def __init__(self, saturation_current_a: _Optional[float] = ..., thermal_voltage_v: _Optional[float] = ...) -> None: ...

class Arrester(_message.Message):
    __slots__ = ("a", "b", "reference_voltage_v", "reference_current_a", "exponent")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    REFERENCE_VOLTAGE_V_FIELD_NUMBER: _ClassVar[int]
    REFERENCE_CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    EXPONENT_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    reference_voltage_v: float
    reference_current_a: float
    exponent: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., reference_voltage_v: _Optional[float] = ..., reference_current_a: _Optional[float] = ..., exponent: _Optional[float] = ...) -> None: ...

class SaturableInductor(_message.Message):
    __slots__ = ("a", "b", "current_a", "flux_linkage_wb", "residual_wb")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CURRENT_A_FIELD_NUMBER: _ClassVar[int]
    FLUX_LINKAGE_WB_FIELD_NUMBER: _ClassVar[int]
    RESIDUAL_WB_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    current_a: _array_pb2.Array
    flux_linkage_wb: _array_pb2.Array
    residual_wb: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., current_a: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., flux_linkage_wb: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., residual_wb: _Optional[float] = ...) -> None: ...

class IdealTransformer(_message.Message):
    __slots__ = ("a", "b", "c", "d", "turns_ratio")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    C_FIELD_NUMBER: _ClassVar[int]
    D_FIELD_NUMBER: _ClassVar[int]
    TURNS_RATIO_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    c: str
    d: str
    turns_ratio: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., c: _Optional[str] = ..., d: _Optional[str] = ..., turns_ratio: _Optional[float] = ...) -> None: ...

class VoltageByVoltage(_message.Message):
    __slots__ = ("a", "b", "control_a", "control_b", "gain")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CONTROL_A_FIELD_NUMBER: _ClassVar[int]
    CONTROL_B_FIELD_NUMBER: _ClassVar[int]
    GAIN_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    control_a: str
    control_b: str
    gain: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., control_a: _Optional[str] = ..., control_b: _Optional[str] = ..., gain: _Optional[float] = ...) -> None: ...

class CurrentByVoltage(_message.Message):
    __slots__ = ("a", "b", "control_a", "control_b", "transconductance_s")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CONTROL_A_FIELD_NUMBER: _ClassVar[int]
    CONTROL_B_FIELD_NUMBER: _ClassVar[int]
    TRANSCONDUCTANCE_S_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    control_a: str
    control_b: str
    transconductance_s: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., control_a: _Optional[str] = ..., control_b: _Optional[str] = ..., transconductance_s: _Optional[float] = ...) -> None: ...

class VoltageByCurrent(_message.Message):
    __slots__ = ("a", "b", "control", "transresistance_ohm")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CONTROL_FIELD_NUMBER: _ClassVar[int]
    TRANSRESISTANCE_OHM_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    control: str
    transresistance_ohm: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., control: _Optional[str] = ..., transresistance_ohm: _Optional[float] = ...) -> None: ...

class CurrentByCurrent(_message.Message):
    __slots__ = ("a", "b", "control", "gain")
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    CONTROL_FIELD_NUMBER: _ClassVar[int]
    GAIN_FIELD_NUMBER: _ClassVar[int]
    a: str
    b: str
    control: str
    gain: float
    def __init__(self, a: _Optional[str] = ..., b: _Optional[str] = ..., control: _Optional[str] = ..., gain: _Optional[float] = ...) -> None: ...
