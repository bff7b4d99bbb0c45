"""A table's contract as data: what its columns are called, mean and may hold.

Nothing here reads a file or looks at a value. `loader` makes contracts from
``schemas/``; `arrays` and `frames` hold tables against them.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Final, Literal

__all__ = ["ISO_TIME", "Contract", "Direction", "Field", "FieldType"]

FieldType = Literal["string", "number", "integer", "boolean", "datetime"]
Direction = Literal["in", "out"]

ISO_TIME: Final = (
    r"[0-9]{4}-?[0-9]{2}-?[0-9]{2}"
    r"([T ][0-9]{2}(:?[0-9]{2}(:?[0-9]{2}([.,][0-9]{1,9})?)?)?(Z|[+-][0-9]{2}(:?[0-9]{2})?)?)?"
)
"""Shape of an ISO 8601 date, or date and time; whether the day exists is not its business."""


@dataclass(frozen=True)
class Field:
    """One column.

    Attributes
    ----------
    name : str
        Name of the column in the file's header.
    type : {"string", "number", "integer", "boolean", "datetime"}
        A datetime is ISO 8601 text.
    title, description : str
        For a person: a few words, and as much as it takes to use the column.
    unit : str or None
        UCUM code; every number and integer has one. In braces stands the column
        of the same row that tells the unit: ``{unit}``, or ``{quantity}`` for
        the unit of the quantity that is named there.
    source : str or None
        Standard, relation or record that the column comes from.
    required : bool
        Whether the column must be there and every cell of it filled.
    minimum, maximum, exclusive_minimum, exclusive_maximum : float or None
        Ends of the range. [`unit`]
    enum : tuple of str
        The only texts allowed; empty where any text is.
    pattern : str or None
        Regular expression that a whole text must match, in the syntax that
        Python and RE2 share.
    unique : bool
        Whether no two rows may share a value.
    max_length : int or None
        Longest text. [characters]
    checks : tuple of str
        Names of the cross-column checks that the column takes part in.
    """

    name: str
    type: FieldType
    title: str
    description: str
    unit: str | None = None
    source: str | None = None
    required: bool = False
    minimum: float | None = None
    maximum: float | None = None
    exclusive_minimum: float | None = None
    exclusive_maximum: float | None = None
    enum: tuple[str, ...] = ()
    pattern: str | None = None
    unique: bool = False
    max_length: int | None = None
    checks: tuple[str, ...] = ()

    @property
    def numeric(self) -> bool:
        """Whether the cells are numbers."""
        return self.type in ("number", "integer")

    @property
    def text(self) -> bool:
        """Whether the cells are text; a datetime is."""
        return self.type in ("string", "datetime")

    @property
    def whole_pattern(self) -> str | None:
        """Pattern that each filled cell matches from end to end, if there is one."""
        return self.pattern or (ISO_TIME if self.type == "datetime" else None)

    @property
    def range_text(self) -> str:
        """The allowed range in words, empty where every finite number is allowed."""
        low = _end("above", self.exclusive_minimum) or _end("at least", self.minimum)
        high = _end("below", self.exclusive_maximum) or _end("at most", self.maximum)
        return " and ".join(part for part in (low, high) if part)


@dataclass(frozen=True)
class Contract:
    """One table.

    Attributes
    ----------
    name : str
        Direction and table, ``in/coupons``.
    direction : {"in", "out"}
        Whether the table comes in or is published. A table that comes in may
        leave optional columns out and have them in any order; a published one
        has exactly the columns of its contract, in order.
    title, description : str
        For a person.
    version : str
        Within a major version columns are only added.
    fields : tuple of Field
        The columns in order.
    checks : tuple of str
        Names of the cross-column checks that every row, or the table, passes.
    primary_key : tuple of str
        Columns that together name a row; empty where nothing does.
    """

    name: str
    direction: Direction
    title: str
    description: str
    version: str
    fields: tuple[Field, ...]
    checks: tuple[str, ...] = ()
    primary_key: tuple[str, ...] = ()

    @property
    def table(self) -> str:
        """Name of the table without its direction: that of its file without ``.csv``."""
        return self.name.partition("/")[2]

    @cached_property
    def columns(self) -> tuple[str, ...]:
        """Names of the columns, in order."""
        return tuple(field.name for field in self.fields)

    @cached_property
    def required_columns(self) -> tuple[str, ...]:
        """Names of the columns that a table of this contract cannot do without."""
        if self.direction == "out":
            return self.columns
        return tuple(field.name for field in self.fields if field.required)

    def field(self, name: str) -> Field:
        """Give the column of that name.

        Raises
        ------
        KeyError
            If the table has no such column.
        """
        return self._by_name[name]

    @cached_property
    def _by_name(self) -> Mapping[str, Field]:
        return {field.name: field for field in self.fields}


def _end(words: str, end: float | None) -> str:
    return "" if end is None else f"{words} {end:.12g}"
