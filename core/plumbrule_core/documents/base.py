"""What every document shares: frozen, strict, and named by its content."""

import hashlib
import json
from collections.abc import Mapping
from types import MappingProxyType
from typing import Annotated, Any, Self, TypeVar

from pydantic import AfterValidator, BaseModel, ConfigDict, PlainSerializer

K = TypeVar("K")
V = TypeVar("V")

FrozenMap = Annotated[Mapping[K, V], AfterValidator(MappingProxyType), PlainSerializer(dict)]
"""A mapping that cannot be changed after validation."""


class Document(BaseModel):
    """A frozen, validated value; equal content means equal digest."""

    model_config = ConfigDict(
        frozen=True,
        extra="forbid",
        strict=True,
        allow_inf_nan=False,
        populate_by_name=True,
        serialize_by_alias=True,
        protected_namespaces=(),
    )

    def to_data(self) -> dict[str, Any]:
        """The document as plain JSON values; what is absent is left out."""
        return self.model_dump(mode="json", exclude_none=True)

    def to_json(self) -> str:
        """The document as one line of JSON."""
        return json.dumps(self.to_data(), allow_nan=False, separators=(",", ":"))

    @classmethod
    def from_json(cls, line: str | bytes) -> Self:
        """Read the document back; raises pydantic.ValidationError with all faults."""
        return cls.model_validate_json(line)

    @classmethod
    def from_data(cls, data: object) -> Self:
        """Read the document from plain JSON values; raises pydantic.ValidationError with all faults."""
        return cls.model_validate_json(json.dumps(data))

    @property
    def digest(self) -> str:
        """A name made of the content: the same content has the same name, on every machine."""
        return digest_of(self.to_data())


def digest_of(data: object) -> str:
    """Twenty hexadecimal digits that name plain JSON values."""
    canonical = json.dumps(data, allow_nan=False, sort_keys=True, separators=(",", ":"))
    return hashlib.sha256(canonical.encode()).hexdigest()[:20]
