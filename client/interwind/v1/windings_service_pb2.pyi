from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import characterization_pb2 as _characterization_pb2
from interwind.v1 import finding_pb2 as _finding_pb2
from interwind.v1 import reading_pb2 as _reading_pb2
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

class RepairMethod(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    REPAIR_METHOD_UNSPECIFIED: _ClassVar[RepairMethod]
    REPAIR_METHOD_COMPLETION: _ClassVar[RepairMethod]
    REPAIR_METHOD_NEAREST: _ClassVar[RepairMethod]
VERDICT_UNSPECIFIED: Verdict
VERDICT_VALID: Verdict
VERDICT_INVALID: Verdict
VERDICT_UNDECIDED: Verdict
REPAIR_METHOD_UNSPECIFIED: RepairMethod
REPAIR_METHOD_COMPLETION: RepairMethod
REPAIR_METHOD_NEAREST: RepairMethod

class CheckWindingsRequest(_message.Message):
    __slots__ = ("size", "windings")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    windings: _windings_pb2.WindingSet
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ...) -> None: ...

class CheckWindingsResponse(_message.Message):
    __slots__ = ("verdict", "labels", "eigenvalues", "eigenvalues_h", "witness_current_a", "witness_energy_j", "culprits", "feasible_low", "feasible_high", "findings", "cautions", "evidence", "margin", "impossible_subsets", "blame")
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
    MARGIN_FIELD_NUMBER: _ClassVar[int]
    IMPOSSIBLE_SUBSETS_FIELD_NUMBER: _ClassVar[int]
    BLAME_FIELD_NUMBER: _ClassVar[int]
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
    margin: float
    impossible_subsets: _containers.RepeatedCompositeFieldContainer[WindingGroup]
    blame: _array_pb2.Array
    def __init__(self, verdict: _Optional[_Union[Verdict, str]] = ..., labels: _Optional[_Iterable[str]] = ..., eigenvalues: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., eigenvalues_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., witness_current_a: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., witness_energy_j: _Optional[float] = ..., culprits: _Optional[_Iterable[_Union[Culprit, _Mapping]]] = ..., feasible_low: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., feasible_high: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ..., margin: _Optional[float] = ..., impossible_subsets: _Optional[_Iterable[_Union[WindingGroup, _Mapping]]] = ..., blame: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

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

class RepairWindingsRequest(_message.Message):
    __slots__ = ("size", "windings", "trusted", "weights", "floor", "method")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    TRUSTED_FIELD_NUMBER: _ClassVar[int]
    WEIGHTS_FIELD_NUMBER: _ClassVar[int]
    FLOOR_FIELD_NUMBER: _ClassVar[int]
    METHOD_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    windings: _windings_pb2.WindingSet
    trusted: _containers.RepeatedCompositeFieldContainer[WindingPair]
    weights: _array_pb2.Array
    floor: float
    method: RepairMethod
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., trusted: _Optional[_Iterable[_Union[WindingPair, _Mapping]]] = ..., weights: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., floor: _Optional[float] = ..., method: _Optional[_Union[RepairMethod, str]] = ...) -> None: ...

class WindingPair(_message.Message):
    __slots__ = ("first", "second")
    FIRST_FIELD_NUMBER: _ClassVar[int]
    SECOND_FIELD_NUMBER: _ClassVar[int]
    first: str
    second: str
    def __init__(self, first: _Optional[str] = ..., second: _Optional[str] = ...) -> None: ...

class RepairWindingsResponse(_message.Message):
    __slots__ = ("windings", "distance", "changes", "leakage_before_h", "leakage_after_h", "all_shorted_leakage_before_h", "all_shorted_leakage_after_h", "findings", "cautions", "evidence")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    DISTANCE_FIELD_NUMBER: _ClassVar[int]
    CHANGES_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_BEFORE_H_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_AFTER_H_FIELD_NUMBER: _ClassVar[int]
    ALL_SHORTED_LEAKAGE_BEFORE_H_FIELD_NUMBER: _ClassVar[int]
    ALL_SHORTED_LEAKAGE_AFTER_H_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    windings: _windings_pb2.WindingSet
    distance: float
    changes: _containers.RepeatedCompositeFieldContainer[CouplingChange]
    leakage_before_h: _array_pb2.Array
    leakage_after_h: _array_pb2.Array
    all_shorted_leakage_before_h: _array_pb2.Array
    all_shorted_leakage_after_h: _array_pb2.Array
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., distance: _Optional[float] = ..., changes: _Optional[_Iterable[_Union[CouplingChange, _Mapping]]] = ..., leakage_before_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., leakage_after_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., all_shorted_leakage_before_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., all_shorted_leakage_after_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class CouplingChange(_message.Message):
    __slots__ = ("pair", "before", "after", "change_in_uncertainties")
    PAIR_FIELD_NUMBER: _ClassVar[int]
    BEFORE_FIELD_NUMBER: _ClassVar[int]
    AFTER_FIELD_NUMBER: _ClassVar[int]
    CHANGE_IN_UNCERTAINTIES_FIELD_NUMBER: _ClassVar[int]
    pair: WindingPair
    before: float
    after: float
    change_in_uncertainties: float
    def __init__(self, pair: _Optional[_Union[WindingPair, _Mapping]] = ..., before: _Optional[float] = ..., after: _Optional[float] = ..., change_in_uncertainties: _Optional[float] = ...) -> None: ...

class IdentifyWindingsRequest(_message.Message):
    __slots__ = ("size", "labels", "readings", "aim")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    LABELS_FIELD_NUMBER: _ClassVar[int]
    READINGS_FIELD_NUMBER: _ClassVar[int]
    AIM_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    labels: _containers.RepeatedScalarFieldContainer[str]
    readings: _containers.RepeatedCompositeFieldContainer[_reading_pb2.Reading]
    aim: _containers.RepeatedScalarFieldContainer[str]
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., labels: _Optional[_Iterable[str]] = ..., readings: _Optional[_Iterable[_Union[_reading_pb2.Reading, _Mapping]]] = ..., aim: _Optional[_Iterable[str]] = ...) -> None: ...

class IdentifyWindingsResponse(_message.Message):
    __slots__ = ("windings", "covariance_h2", "chi_square", "degree_of_freedom_count", "residuals", "outliers", "next_reading", "leakage_h", "leakage_uncertainty_h", "findings", "cautions", "evidence")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    COVARIANCE_H2_FIELD_NUMBER: _ClassVar[int]
    CHI_SQUARE_FIELD_NUMBER: _ClassVar[int]
    DEGREE_OF_FREEDOM_COUNT_FIELD_NUMBER: _ClassVar[int]
    RESIDUALS_FIELD_NUMBER: _ClassVar[int]
    OUTLIERS_FIELD_NUMBER: _ClassVar[int]
    NEXT_READING_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_H_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    windings: _windings_pb2.WindingSet
    covariance_h2: _array_pb2.Array
    chi_square: float
    degree_of_freedom_count: int
    residuals: _array_pb2.Array
    outliers: _containers.RepeatedCompositeFieldContainer[Outlier]
    next_reading: _reading_pb2.Reading
    leakage_h: _array_pb2.Array
    leakage_uncertainty_h: _array_pb2.Array
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., covariance_h2: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., chi_square: _Optional[float] = ..., degree_of_freedom_count: _Optional[int] = ..., residuals: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., outliers: _Optional[_Iterable[_Union[Outlier, _Mapping]]] = ..., next_reading: _Optional[_Union[_reading_pb2.Reading, _Mapping]] = ..., leakage_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., leakage_uncertainty_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class Outlier(_message.Message):
    __slots__ = ("position", "windings", "residual")
    POSITION_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    RESIDUAL_FIELD_NUMBER: _ClassVar[int]
    position: int
    windings: _containers.RepeatedScalarFieldContainer[str]
    residual: float
    def __init__(self, position: _Optional[int] = ..., windings: _Optional[_Iterable[str]] = ..., residual: _Optional[float] = ...) -> None: ...

class CharacterizeWindingsRequest(_message.Message):
    __slots__ = ("size", "windings", "connections", "frequency_hz")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    CONNECTIONS_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_HZ_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    windings: _windings_pb2.WindingSet
    connections: _containers.RepeatedCompositeFieldContainer[_characterization_pb2.Connection]
    frequency_hz: _array_pb2.Array
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., connections: _Optional[_Iterable[_Union[_characterization_pb2.Connection, _Mapping]]] = ..., frequency_hz: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class CharacterizeWindingsResponse(_message.Message):
    __slots__ = ("windings", "leakage_h", "leakage_uncertainty_h", "all_shorted_leakage_h", "all_shorted_leakage_uncertainty_h", "inverse_inductance_per_h", "modes", "equivalents", "sharing", "findings", "cautions", "evidence")
    WINDINGS_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_H_FIELD_NUMBER: _ClassVar[int]
    LEAKAGE_UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    ALL_SHORTED_LEAKAGE_H_FIELD_NUMBER: _ClassVar[int]
    ALL_SHORTED_LEAKAGE_UNCERTAINTY_H_FIELD_NUMBER: _ClassVar[int]
    INVERSE_INDUCTANCE_PER_H_FIELD_NUMBER: _ClassVar[int]
    MODES_FIELD_NUMBER: _ClassVar[int]
    EQUIVALENTS_FIELD_NUMBER: _ClassVar[int]
    SHARING_FIELD_NUMBER: _ClassVar[int]
    FINDINGS_FIELD_NUMBER: _ClassVar[int]
    CAUTIONS_FIELD_NUMBER: _ClassVar[int]
    EVIDENCE_FIELD_NUMBER: _ClassVar[int]
    windings: _windings_pb2.WindingSet
    leakage_h: _array_pb2.Array
    leakage_uncertainty_h: _array_pb2.Array
    all_shorted_leakage_h: _array_pb2.Array
    all_shorted_leakage_uncertainty_h: _array_pb2.Array
    inverse_inductance_per_h: _array_pb2.Array
    modes: _characterization_pb2.Modes
    equivalents: _containers.RepeatedCompositeFieldContainer[_characterization_pb2.EquivalentCircuit]
    sharing: _containers.RepeatedCompositeFieldContainer[_characterization_pb2.CurrentSharing]
    findings: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Finding]
    cautions: _containers.RepeatedCompositeFieldContainer[_finding_pb2.Caution]
    evidence: _finding_pb2.Evidence
    def __init__(self, windings: _Optional[_Union[_windings_pb2.WindingSet, _Mapping]] = ..., leakage_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., leakage_uncertainty_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., all_shorted_leakage_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., all_shorted_leakage_uncertainty_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., inverse_inductance_per_h: _Optional[_Union[_array_pb2.Array, _Mapping]] = ..., modes: _Optional[_Union[_characterization_pb2.Modes, _Mapping]] = ..., equivalents: _Optional[_Iterable[_Union[_characterization_pb2.EquivalentCircuit, _Mapping]]] = ..., sharing: _Optional[_Iterable[_Union[_characterization_pb2.CurrentSharing, _Mapping]]] = ..., findings: _Optional[_Iterable[_Union[_finding_pb2.Finding, _Mapping]]] = ..., cautions: _Optional[_Iterable[_Union[_finding_pb2.Caution, _Mapping]]] = ..., evidence: _Optional[_Union[_finding_pb2.Evidence, _Mapping]] = ...) -> None: ...

class WindingGroup(_message.Message):
    __slots__ = ("labels",)
    LABELS_FIELD_NUMBER: _ClassVar[int]
    labels: _containers.RepeatedScalarFieldContainer[str]
    def __init__(self, labels: _Optional[_Iterable[str]] = ...) -> None: ...
