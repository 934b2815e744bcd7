from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import finding_pb2 as _finding_pb2
from interwind.v1 import network_pb2 as _network_pb2
from interwind.v1 import observable_pb2 as _observable_pb2
from interwind.v1 import response_pb2 as _response_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class PortMode(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    PORT_MODE_UNSPECIFIED: _ClassVar[PortMode]
    PORT_MODE_DIFFERENTIAL: _ClassVar[PortMode]
    PORT_MODE_COMMON: _ClassVar[PortMode]
PORT_MODE_UNSPECIFIED: PortMode
PORT_MODE_DIFFERENTIAL: PortMode
PORT_MODE_COMMON: PortMode

class ComputeFrequencyResponseRequest(_message.Message):
    __slots__ = ("size", "network", "frequency_hz", "adaptive_sweep", "observe")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    ADAPTIVE_SWEEP_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    frequency_hz: _array_pb2.Array
    adaptive_sweep: AdaptiveSweep
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., adaptive_sweep: _Optional[_Union[AdaptiveSweep, _Mapping]] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ...) -> None: ...

class AdaptiveSweep(_message.Message):
    __slots__ = ("start_hz", "stop_hz", "tolerance_db")
    START_HZ_FIELD_NUMBER: _ClassVar[int]
    STOP_HZ_FIELD_NUMBER: _ClassVar[int]
    TOLERANCE_DB_FIELD_NUMBER: _ClassVar[int]
    start_hz: float
    stop_hz: float
    tolerance_db: float
    def __init__(self, start_hz: _Optional[float] = ..., stop_hz: _Optional[float] = ..., tolerance_db: _Optional[float] = ...) -> None: ...

class ComputeFrequencyResponseResponse(_message.Message):
    __slots__ = ("progress", "header", "chunk", "trailer")
    PROGRESS_FIELD_NUMBER: _ClassVar[int]
    HEADER_FIELD_NUMBER: _ClassVar[int]
    CHUNK_FIELD_NUMBER: _ClassVar[int]
    TRAILER_FIELD_NUMBER: _ClassVar[int]
    progress: _response_pb2.Progress
    header: _response_pb2.ResultHeader
    chunk: _response_pb2.ResultChunk
    trailer: _response_pb2.ResultTrailer
    def __init__(self, progress: _Optional[_Union[_response_pb2.Progress, _Mapping]] = ..., header: _Optional[_Union[_response_pb2.ResultHeader, _Mapping]] = ..., chunk: _Optional[_Union[_response_pb2.ResultChunk, _Mapping]] = ..., trailer: _Optional[_Union[_response_pb2.ResultTrailer, _Mapping]] = ...) -> None: ...

class ComputePortResponseRequest(_message.Message):
    __slots__ = ("size", "network", "frequency_hz")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    frequency_hz: _array_pb2.Array
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class ComputePortResponseResponse(_message.Message):
    __slots__ = ("progress", "header", "chunk", "trailer")
    PROGRESS_FIELD_NUMBER: _ClassVar[int]
    HEADER_FIELD_NUMBER: _ClassVar[int]
    CHUNK_FIELD_NUMBER: _ClassVar[int]
    TRAILER_FIELD_NUMBER: _ClassVar[int]
    progress: _response_pb2.Progress
    header: _response_pb2.ResultHeader
    chunk: _response_pb2.ResultChunk
    trailer: _response_pb2.ResultTrailer
    def __init__(self, progress: _Optional[_Union[_response_pb2.Progress, _Mapping]] = ..., header: _Optional[_Union[_response_pb2.ResultHeader, _Mapping]] = ..., chunk: _Optional[_Union[_response_pb2.ResultChunk, _Mapping]] = ..., trailer: _Optional[_Union[_response_pb2.ResultTrailer, _Mapping]] = ...) -> None: ...

class ComputeTimeResponseRequest(_message.Message):
    __slots__ = ("size", "network", "stop_s", "step_s", "observe", "initial", "steady_start", "tolerance", "recording")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    STOP_S_FIELD_NUMBER: _ClassVar[int]
    STEP_S_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    INITIAL_FIELD_NUMBER: _ClassVar[int]
    STEADY_START_FIELD_NUMBER: _ClassVar[int]
    TOLERANCE_FIELD_NUMBER: _ClassVar[int]
    RECORDING_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    stop_s: float
    step_s: float
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    initial: _containers.RepeatedCompositeFieldContainer[_response_pb2.InitialValue]
    steady_start: bool
    tolerance: float
    recording: Recording
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., stop_s: _Optional[float] = ..., step_s: _Optional[float] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., initial: _Optional[_Iterable[_Union[_response_pb2.InitialValue, _Mapping]]] = ..., steady_start: bool = ..., tolerance: _Optional[float] = ..., recording: _Optional[_Union[Recording, _Mapping]] = ...) -> None: ...

class Recording(_message.Message):
    __slots__ = ("from_s", "until_s", "every_count", "envelope")
    FROM_S_FIELD_NUMBER: _ClassVar[int]
    UNTIL_S_FIELD_NUMBER: _ClassVar[int]
    EVERY_COUNT_FIELD_NUMBER: _ClassVar[int]
    ENVELOPE_FIELD_NUMBER: _ClassVar[int]
    from_s: float
    until_s: float
    every_count: int
    envelope: bool
    def __init__(self, from_s: _Optional[float] = ..., until_s: _Optional[float] = ..., every_count: _Optional[int] = ..., envelope: bool = ...) -> None: ...

class ComputeTimeResponseResponse(_message.Message):
    __slots__ = ("progress", "header", "chunk", "trailer")
    PROGRESS_FIELD_NUMBER: _ClassVar[int]
    HEADER_FIELD_NUMBER: _ClassVar[int]
    CHUNK_FIELD_NUMBER: _ClassVar[int]
    TRAILER_FIELD_NUMBER: _ClassVar[int]
    progress: _response_pb2.Progress
    header: _response_pb2.ResultHeader
    chunk: _response_pb2.ResultChunk
    trailer: _response_pb2.ResultTrailer
    def __init__(self, progress: _Optional[_Union[_response_pb2.Progress, _Mapping]] = ..., header: _Optional[_Union[_response_pb2.ResultHeader, _Mapping]] = ..., chunk: _Optional[_Union[_response_pb2.ResultChunk, _Mapping]] = ..., trailer: _Optional[_Union[_response_pb2.ResultTrailer, _Mapping]] = ...) -> None: ...

class ComputePeriodicResponseRequest(_message.Message):
    __slots__ = ("size", "network", "period_s", "step_s", "observe", "tolerance")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    PERIOD_S_FIELD_NUMBER: _ClassVar[int]
    STEP_S_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    TOLERANCE_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    period_s: float
    step_s: float
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    tolerance: float
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., period_s: _Optional[float] = ..., step_s: _Optional[float] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., tolerance: _Optional[float] = ...) -> None: ...

class ComputePeriodicResponseResponse(_message.Message):
    __slots__ = ("progress", "header", "chunk", "trailer")
    PROGRESS_FIELD_NUMBER: _ClassVar[int]
    HEADER_FIELD_NUMBER: _ClassVar[int]
    CHUNK_FIELD_NUMBER: _ClassVar[int]
    TRAILER_FIELD_NUMBER: _ClassVar[int]
    progress: _response_pb2.Progress
    header: _response_pb2.ResultHeader
    chunk: _response_pb2.ResultChunk
    trailer: _response_pb2.ResultTrailer
    def __init__(self, progress: _Optional[_Union[_response_pb2.Progress, _Mapping]] = ..., header: _Optional[_Union[_response_pb2.ResultHeader, _Mapping]] = ..., chunk: _Optional[_Union[_response_pb2.ResultChunk, _Mapping]] = ..., trailer: _Optional[_Union[_response_pb2.ResultTrailer, _Mapping]] = ...) -> None: ...

class ComputePolesRequest(_message.Message):
    __slots__ = ("size", "network", "observe", "around_hz")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    OBSERVE_FIELD_NUMBER: _ClassVar[int]
    AROUND_HZ_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    observe: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    around_hz: float
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., observe: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., around_hz: _Optional[float] = ...) -> None: ...

class ComputePolesResponse(_message.Message):
    __slots__ = ("pole_per_s", "frequency_hz", "quality_factor", "observables", "residue", "zeros", "participants", "participation", "findings", "cautions", "evidence")
    POLE_PER_S_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    QUALITY_FACTOR_FIELD_NUMBER: _ClassVar[int]
    OBSERVABLES_FIELD_NUMBER: _ClassVar[int]
    RESIDUE_FIELD_NUMBER: _ClassVar[int]
    ZEROS_FIELD_NUMBER: _ClassVar[int]
    PARTICIPANTS_FIELD_NUMBER: _ClassVar[int]
    PARTICIPATION_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    pole_per_s: _array_pb2.Array
    frequency_hz: _array_pb2.Array
    quality_factor: _array_pb2.Array
    observables: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    residue: _array_pb2.Array
    zeros: _containers.RepeatedCompositeFieldContainer[ZeroList]
    participants: _containers.RepeatedCompositeFieldContainer[_observable_pb2.WindingName]
    participation: _array_pb2.Array
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, pole_per_s: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., quality_factor: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., observables: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., residue: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., zeros: _Optional[_Iterable[_Union[ZeroList, _Mapping]]] = ..., participants: _Optional[_Iterable[_Union[_observable_pb2.WindingName, _Mapping]]] = ..., participation: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class ZeroList(_message.Message):
    __slots__ = ("zero_per_s",)
    ZERO_PER_S_FIELD_NUMBER: _ClassVar[int]
    zero_per_s: _array_pb2.Array
    def __init__(self, zero_per_s: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class ComputePortFiguresRequest(_message.Message):
    __slots__ = ("size", "network", "frequency_hz", "figures")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    FIGURES_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    network: _network_pb2.Network
    frequency_hz: _array_pb2.Array
    figures: _containers.RepeatedCompositeFieldContainer[PortFigure]
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., figures: _Optional[_Iterable[_Union[PortFigure, _Mapping]]] = ...) -> None: ...

class ComputePortFiguresResponse(_message.Message):
    __slots__ = ("frequency_hz", "figures", "samples", "findings", "cautions", "evidence")
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    FIGURES_FIELD_NUMBER: _ClassVar[int]
    SAMPLES_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    frequency_hz: _array_pb2.Array
    figures: _containers.RepeatedCompositeFieldContainer[PortFigure]
    samples: _array_pb2.Array
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., figures: _Optional[_Iterable[_Union[PortFigure, _Mapping]]] = ..., samples: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class PortPlace(_message.Message):
    __slots__ = ("mode", "a", "b")
    MODE_FIELD_NUMBER: _ClassVar[int]
    A_FIELD_NUMBER: _ClassVar[int]
    B_FIELD_NUMBER: _ClassVar[int]
    mode: PortMode
    a: str
    b: str
    def __init__(self, mode: _Optional[_Union[PortMode, str]] = ..., a: _Optional[str] = ..., b: _Optional[str] = ...) -> None: ...

class PlacePair(_message.Message):
    __slots__ = ("measured", "driven")
    MEASURED_FIELD_NUMBER: _ClassVar[int]
    DRIVEN_FIELD_NUMBER: _ClassVar[int]
    measured: PortPlace
    driven: PortPlace
    def __init__(self, measured: _Optional[_Union[PortPlace, _Mapping]] = ..., driven: _Optional[_Union[PortPlace, _Mapping]] = ...) -> None: ...

class InsertionLoss(_message.Message):
    __slots__ = ("source", "load", "source_ohm", "load_ohm")
    SOURCE_FIELD_NUMBER: _ClassVar[int]
    LOAD_FIELD_NUMBER: _ClassVar[int]
    SOURCE_OHM_FIELD_NUMBER: _ClassVar[int]
    LOAD_OHM_FIELD_NUMBER: _ClassVar[int]
    source: PortPlace
    load: PortPlace
    source_ohm: float
    load_ohm: float
    def __init__(self, source: _Optional[_Union[PortPlace, _Mapping]] = ..., load: _Optional[_Union[PortPlace, _Mapping]] = ..., source_ohm: _Optional[float] = ..., load_ohm: _Optional[float] = ...) -> None: ...

class PowerLink(_message.Message):
    __slots__ = ("transmitters", "receivers", "port")
    TRANSMITTERS_FIELD_NUMBER: _ClassVar[int]
    RECEIVERS_FIELD_NUMBER: _ClassVar[int]
    PORT_FIELD_NUMBER: _ClassVar[int]
    transmitters: _containers.RepeatedScalarFieldContainer[str]
    receivers: _containers.RepeatedScalarFieldContainer[str]
    port: str
    def __init__(self, transmitters: _Optional[_Iterable[str]] = ..., receivers: _Optional[_Iterable[str]] = ..., port: _Optional[str] = ...) -> None: ...

class PortFigure(_message.Message):
    __slots__ = ("scattering", "insertion_loss", "voltage_transfer", "current_transfer", "input_impedance", "input_angle", "link_efficiency", "optimum_load", "optimum_drive")
    SCATTERING_FIELD_NUMBER: _ClassVar[int]
    INSERTION_LOSS_FIELD_NUMBER: _ClassVar[int]
    VOLTAGE_TRANSFER_FIELD_NUMBER: _ClassVar[int]
    CURRENT_TRANSFER_FIELD_NUMBER: _ClassVar[int]
    INPUT_IMPEDANCE_FIELD_NUMBER: _ClassVar[int]
    INPUT_ANGLE_FIELD_NUMBER: _ClassVar[int]
    LINK_EFFICIENCY_FIELD_NUMBER: _ClassVar[int]
    OPTIMUM_LOAD_FIELD_NUMBER: _ClassVar[int]
    OPTIMUM_DRIVE_FIELD_NUMBER: _ClassVar[int]
    scattering: PlacePair
    insertion_loss: InsertionLoss
    voltage_transfer: PlacePair
    current_transfer: PlacePair
    input_impedance: PortPlace
    input_angle: PortPlace
    link_efficiency: PowerLink
    optimum_load: PowerLink
    optimum_drive: PowerLink
    def __init__(self, scattering: _Optional[_Union[PlacePair, _Mapping]] = ..., insertion_loss: _Optional[_Union[InsertionLoss, _Mapping]] = ..., voltage_transfer: _Optional[_Union[PlacePair, _Mapping]] = ..., current_transfer: _Optional[_Union[PlacePair, _Mapping]] = ..., input_impedance: _Optional[_Union[PortPlace, _Mapping]] = ..., input_angle: _Optional[_Union[PortPlace, _Mapping]] = ..., link_efficiency: _Optional[_Union[PowerLink, _Mapping]] = ..., optimum_load: _Optional[_Union[PowerLink, _Mapping]] = ..., optimum_drive: _Optional[_Union[PowerLink, _Mapping]] = ...) -> None: ...
