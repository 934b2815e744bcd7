from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from typing import ClassVar as _ClassVar, Iterable as _Iterable, Mapping as _Mapping, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Dtype(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    DTYPE_UNSPECIFIED: _ClassVar[Dtype]
    DTYPE_FLOAT64: _ClassVar[Dtype]
    DTYPE_COMPLEX128: _ClassVar[Dtype]
    DTYPE_INT32: _ClassVar[Dtype]
    DTYPE_INT64: _ClassVar[Dtype]
DTYPE_UNSPECIFIED: Dtype
DTYPE_FLOAT64: Dtype
DTYPE_COMPLEX128: Dtype
DTYPE_INT32: Dtype
DTYPE_INT64: Dtype

class Array(_message.Message):
    __slots__ = ("shape", "dtype", "data", "values", "content_hash")
    SHAPE_FIELD_NUMBER: _ClassVar[int]
    DTYPE_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    VALUES_FIELD_NUMBER: _ClassVar[int]
    CONTENT_HASH_FIELD_NUMBER: _ClassVar[int]
    shape: _containers.RepeatedScalarFieldContainer[int]
    dtype: Dtype
    data: bytes
    values: DoubleList
    content_hash: str
    def __init__(self, shape: _Optional[_Iterable[int]] = ..., dtype: _Optional[_Union[Dtype, str]] = ..., data: _Optional[bytes] = ..., values: _Optional[_Union[DoubleList, _Mapping]] = ..., content_hash: _Optional[str] = ...) -> None: ...

class DoubleList(_message.Message):
    __slots__ = ("values",)
    VALUES_FIELD_NUMBER: _ClassVar[int]
    values: _containers.RepeatedScalarFieldContainer[float]
    def __init__(self, values: _Optional[_Iterable[float]] = ...) -> None: ...
