from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Mapping as _Mapping, Optional as _Optional

DESCRIPTOR: _descriptor.FileDescriptor

class GetServerInfoRequest(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class GetServerInfoResponse(_message.Message):
    __slots__ = ("service_version", "api_version", "worker_count", "busy_worker_count", "blas_thread_count", "queue_limit_count", "queued_count", "memory_limit_bytes", "max_timeout_s", "max_request_bytes", "max_winding_count", "library_versions")
    class LibraryVersionsEntry(_message.Message):
        __slots__ = ("key", "value")
        KEY_FIELD_NUMBER: _ClassVar[int]
        VALUE_FIELD_NUMBER: _ClassVar[int]
        key: str
        value: str
        def __init__(self, key: _Optional[str] = ..., value: _Optional[str] = ...) -> None: ...
    SERVICE_VERSION_FIELD_NUMBER: _ClassVar[int]
    API_VERSION_FIELD_NUMBER: _ClassVar[int]
    WORKER_COUNT_FIELD_NUMBER: _ClassVar[int]
    BUSY_WORKER_COUNT_FIELD_NUMBER: _ClassVar[int]
    BLAS_THREAD_COUNT_FIELD_NUMBER: _ClassVar[int]
    QUEUE_LIMIT_COUNT_FIELD_NUMBER: _ClassVar[int]
    QUEUED_COUNT_FIELD_NUMBER: _ClassVar[int]
    MEMORY_LIMIT_BYTES_FIELD_NUMBER: _ClassVar[int]
    MAX_TIMEOUT_S_FIELD_NUMBER: _ClassVar[int]
    MAX_REQUEST_BYTES_FIELD_NUMBER: _ClassVar[int]
    MAX_WINDING_COUNT_FIELD_NUMBER: _ClassVar[int]
    LIBRARY_VERSIONS_FIELD_NUMBER: _ClassVar[int]
    service_version: str
    api_version: str
    worker_count: int
    busy_worker_count: int
    blas_thread_count: int
    queue_limit_count: int
    queued_count: int
    memory_limit_bytes: int
    max_timeout_s: float
    max_request_bytes: int
    max_winding_count: int
    library_versions: _containers.ScalarMap[str, str]
    def __init__(self, service_version: _Optional[str] = ..., api_version: _Optional[str] = ..., worker_count: _Optional[int] = ..., busy_worker_count: _Optional[int] = ..., blas_thread_count: _Optional[int] = ..., queue_limit_count: _Optional[int] = ..., queued_count: _Optional[int] = ..., memory_limit_bytes: _Optional[int] = ..., max_timeout_s: _Optional[float] = ..., max_request_bytes: _Optional[int] = ..., max_winding_count: _Optional[int] = ..., library_versions: _Optional[_Mapping[str, str]] = ...) -> None: ...
