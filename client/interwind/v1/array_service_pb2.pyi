from interwind.v1 import array_pb2 as _array_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class PutArrayRequest(_message.Message):
    __slots__ = ("content_hash", "shape", "dtype", "offset_bytes", "data")
    CONTENT_HASH_FIELD_NUMBER: _ClassVar[int]
    SHAPE_FIELD_NUMBER: _ClassVar[int]
    DTYPE_FIELD_NUMBER: _ClassVar[int]
    OFFSET_BYTES_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    content_hash: str
    shape: _containers.RepeatedScalarFieldContainer[int]
    dtype: _array_pb2.Dtype
    offset_bytes: int
    data: bytes
    def __init__(self, content_hash: _Optional[str] = ..., shape: _Optional[_Iterable[int]] = ..., dtype: _Optional[_Union[_array_pb2.Dtype, str]] = ..., offset_bytes: _Optional[int] = ..., data: _Optional[bytes] = ...) -> None: ...

class PutArrayResponse(_message.Message):
    __slots__ = ("received_bytes", "complete")
    RECEIVED_BYTES_FIELD_NUMBER: _ClassVar[int]
    COMPLETE_FIELD_NUMBER: _ClassVar[int]
    received_bytes: int
    complete: bool
    def __init__(self, received_bytes: _Optional[int] = ..., complete: bool = ...) -> None: ...

class GetArrayRequest(_message.Message):
    __slots__ = ("content_hash", "offset_bytes")
    CONTENT_HASH_FIELD_NUMBER: _ClassVar[int]
    OFFSET_BYTES_FIELD_NUMBER: _ClassVar[int]
    content_hash: str
    offset_bytes: int
    def __init__(self, content_hash: _Optional[str] = ..., offset_bytes: _Optional[int] = ...) -> None: ...

class GetArrayResponse(_message.Message):
    __slots__ = ("offset_bytes", "data")
    OFFSET_BYTES_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    offset_bytes: int
    data: bytes
    def __init__(self, offset_bytes: _Optional[int] = ..., data: _Optional[bytes] = ...) -> None: ...
