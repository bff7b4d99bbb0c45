"""What a plot must know about a batch beside its tables."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

__all__ = ["Context"]


@dataclass(frozen=True)
class Context:
    """The words and limits of the batch sheet that belong on a plot.

    Attributes
    ----------
    batch_id : str
        The batch's own name.
    material : str
        The metal.
    route : str
        `indent`, `flow` or `both`.
    coverage : float
        Probability that the published intervals are made for. [1]
    limits : sequence of mapping
        The sheet's limits, each with `id`, `quantity`, `lower`, `upper`, `rule`
        and `basis`; ends in the unit of the quantity's column, None where open.
    note : str
        One sentence on the state that the rows describe, with its test strain.
    timezone : str
        Zone that times without one are read in, and that the drift plot shows.
    """

    batch_id: str
    material: str
    route: str
    coverage: float = 0.95
    limits: Sequence[Mapping[str, object]] = field(default_factory=tuple)
    note: str = ""
    timezone: str = "UTC"

    @property
    def percent(self) -> str:
        """The coverage as people write it, such as `95 %`."""
        return f"{100.0 * self.coverage:.6g} %"
