from interwind.v1 import array_pb2 as _array_pb2
from interwind.v1 import batch_pb2 as _batch_pb2
from interwind.v1 import network_pb2 as _network_pb2
from interwind.v1 import observable_pb2 as _observable_pb2
from interwind.v1 import response_pb2 as _response_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class SubmitBatchRequest(_message.Message):
    __slots__ = ("size", "request_id", "validate_only", "network", "frequency", "time", "periodic", "check", "columns")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    REQUEST_ID_FIELD_NUMBER: _ClassVar[int]
    VALIDATE_ONLY_FIELD_NUMBER: _ClassVar[int]
    NETWORK_FIELD_NUMBER: _ClassVar[int]
    FREQUENCY_FIELD_NUMBER: _ClassVar[int]
    TIME_FIELD_NUMBER: _ClassVar[int]
    PERIODIC_FIELD_NUMBER: _ClassVar[int]
    CHECK_FIELD_NUMBER: _ClassVar[int]
    COLUMNS_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    request_id: str
    validate_only: bool
    network: _network_pb2.Network
    frequency: _batch_pb2.FrequencyAnalysis
    time: _batch_pb2.TimeAnalysis
    periodic: _batch_pb2.PeriodicAnalysis
    check: _batch_pb2.CheckAnalysis
    columns: _containers.RepeatedCompositeFieldContainer[_batch_pb2.OverrideColumn]
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., request_id: _Optional[str] = ..., validate_only: bool = ..., network: _Optional[_Union[_network_pb2.Network, _Mapping]] = ..., frequency: _Optional[_Union[_batch_pb2.FrequencyAnalysis, _Mapping]] = ..., time: _Optional[_Union[_batch_pb2.TimeAnalysis, _Mapping]] = ..., periodic: _Optional[_Union[_batch_pb2.PeriodicAnalysis, _Mapping]] = ..., check: _Optional[_Union[_batch_pb2.CheckAnalysis, _Mapping]] = ..., columns: _Optional[_Iterable[_Union[_batch_pb2.OverrideColumn, _Mapping]]] = ...) -> None: ...

class SubmitBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _batch_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_batch_pb2.Batch, _Mapping]] = ...) -> None: ...

class GetBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class GetBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _batch_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_batch_pb2.Batch, _Mapping]] = ...) -> None: ...

class ListBatchesRequest(_message.Message):
    __slots__ = ("page_size", "page_token")
    PAGE_SIZE_FIELD_NUMBER: _ClassVar[int]
    PAGE_TOKEN_FIELD_NUMBER: _ClassVar[int]
    page_size: int
    page_token: str
    def __init__(self, page_size: _Optional[int] = ..., page_token: _Optional[str] = ...) -> None: ...

class ListBatchesResponse(_message.Message):
    __slots__ = ("batches", "next_page_token")
    BATCHES_FIELD_NUMBER: _ClassVar[int]
    NEXT_PAGE_TOKEN_FIELD_NUMBER: _ClassVar[int]
    batches: _containers.RepeatedCompositeFieldContainer[_batch_pb2.Batch]
    next_page_token: str
    def __init__(self, batches: _Optional[_Iterable[_Union[_batch_pb2.Batch, _Mapping]]] = ..., next_page_token: _Optional[str] = ...) -> None: ...

class WatchBatchRequest(_message.Message):
    __slots__ = ("batch_id", "after_sequence")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    AFTER_SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    after_sequence: int
    def __init__(self, batch_id: _Optional[str] = ..., after_sequence: _Optional[int] = ...) -> None: ...

class WatchBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _batch_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_batch_pb2.Batch, _Mapping]] = ...) -> None: ...

class StreamBatchResultsRequest(_message.Message):
    __slots__ = ("batch_id", "start_row", "wait")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    START_ROW_FIELD_NUMBER: _ClassVar[int]
    WAIT_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    start_row: int
    wait: bool
    def __init__(self, batch_id: _Optional[str] = ..., start_row: _Optional[int] = ..., wait: bool = ...) -> None: ...

class StreamBatchResultsResponse(_message.Message):
    __slots__ = ("header", "chunk", "data")
    HEADER_FIELD_NUMBER: _ClassVar[int]
    CHUNK_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    header: BatchResultHeader
    chunk: BatchChunk
    data: _response_pb2.ResultChunk
    def __init__(self, header: _Optional[_Union[BatchResultHeader, _Mapping]] = ..., chunk: _Optional[_Union[BatchChunk, _Mapping]] = ..., data: _Optional[_Union[_response_pb2.ResultChunk, _Mapping]] = ...) -> None: ...

class BatchResultHeader(_message.Message):
    __slots__ = ("variant_count", "columns", "dtype", "point_count", "point_name", "points")
    VARIANT_COUNT_FIELD_NUMBER: _ClassVar[int]
    COLUMNS_FIELD_NUMBER: _ClassVar[int]
    DTYPE_FIELD_NUMBER: _ClassVar[int]
    POINT_COUNT_FIELD_NUMBER: _ClassVar[int]
    POINT_NAME_FIELD_NUMBER: _ClassVar[int]
    POINTS_FIELD_NUMBER: _ClassVar[int]
    variant_count: int
    columns: _containers.RepeatedCompositeFieldContainer[_observable_pb2.Observable]
    dtype: _array_pb2.Dtype
    point_count: int
    point_name: str
    points: _array_pb2.Array
    def __init__(self, variant_count: _Optional[int] = ..., columns: _Optional[_Iterable[_Union[_observable_pb2.Observable, _Mapping]]] = ..., dtype: _Optional[_Union[_array_pb2.Dtype, str]] = ..., point_count: _Optional[int] = ..., point_name: _Optional[str] = ..., points: _Optional[_Union[_array_pb2.Array, _Mapping]] = ...) -> None: ...

class BatchChunk(_message.Message):
    __slots__ = ("first_row", "row_count", "statuses", "reasons", "size_bytes", "sha256")
    FIRST_ROW_FIELD_NUMBER: _ClassVar[int]
    ROW_COUNT_FIELD_NUMBER: _ClassVar[int]
    STATUSES_FIELD_NUMBER: _ClassVar[int]
    REASONS_FIELD_NUMBER: _ClassVar[int]
    SIZE_BYTES_FIELD_NUMBER: _ClassVar[int]
    SHA256_FIELD_NUMBER: _ClassVar[int]
    first_row: int
    row_count: int
    statuses: _containers.RepeatedScalarFieldContainer[_batch_pb2.VariantStatus]
    reasons: _containers.RepeatedCompositeFieldContainer[VariantReason]
    size_bytes: int
    sha256: str
    def __init__(self, first_row: _Optional[int] = ..., row_count: _Optional[int] = ..., statuses: _Optional[_Iterable[_Union[_batch_pb2.VariantStatus, str]]] = ..., reasons: _Optional[_Iterable[_Union[VariantReason, _Mapping]]] = ..., size_bytes: _Optional[int] = ..., sha256: _Optional[str] = ...) -> None: ...

class VariantReason(_message.Message):
    __slots__ = ("row", "code", "message")
    ROW_FIELD_NUMBER: _ClassVar[int]
    CODE_FIELD_NUMBER: _ClassVar[int]
    MESSAGE_FIELD_NUMBER: _ClassVar[int]
    row: int
    code: str
    message: str
    def __init__(self, row: _Optional[int] = ..., code: _Optional[str] = ..., message: _Optional[str] = ...) -> None: ...

class SummarizeBatchRequest(_message.Message):
    __slots__ = ("size", "batch_id", "quantile_levels", "extreme_count")
    SIZE_FIELD_NUMBER: _ClassVar[int]
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    QUANTILE_LEVELS_FIELD_NUMBER: _ClassVar[int]
    EXTREME_COUNT_FIELD_NUMBER: _ClassVar[int]
    size: _response_pb2.Size
    batch_id: str
    quantile_levels: _containers.RepeatedScalarFieldContainer[float]
    extreme_count: int
    def __init__(self, size: _Optional[_Union[_response_pb2.Size, _Mapping]] = ..., batch_id: _Optional[str] = ..., quantile_levels: _Optional[_Iterable[float]] = ..., extreme_count: _Optional[int] = ...) -> None: ...

class SummarizeBatchResponse(_message.Message):
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

class CancelBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class CancelBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _batch_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_batch_pb2.Batch, _Mapping]] = ...) -> None: ...

class DeleteBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class DeleteBatchResponse(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...
