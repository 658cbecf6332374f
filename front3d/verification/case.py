"""What a case of the verification is, and what it gives."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

from front3d.results import Evaluation
from front3d.samples import Sample


@dataclass(frozen=True, slots=True)
class Run:
    """One model to build, solve and evaluate.

    Attributes
    ----------
    sample, cells, part : as `front3d.samples.build` takes them
    parameters : of the sample, those that are not its defaults
    compare : solutions to put beside it; {name} stands for a parameter of the sample
    """

    sample: str
    cells: str = "bricks"
    part: str = "full"
    parameters: Mapping[str, float] = field(default_factory=dict)
    compare: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Outcome:
    """A run that was made."""

    run: Run
    sample: Sample
    evaluation: Evaluation


@dataclass(frozen=True, slots=True)
class Measured:
    """A deviation found, in per cent.

    Attributes
    ----------
    method : whose K was compared
    load : name of the load, and what else tells the row from others of its case
    stations : how many were compared
    worst : the largest deviation, with its sign; where : mode and place of it
    mean : the mean magnitude
    """

    method: str
    load: str
    stations: int
    worst: float
    where: str
    mean: float


Measure = Callable[[Sequence[Outcome]], list[Measured]]


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """A question with a known answer.

    Attributes
    ----------
    name : unique, in plain words
    source : where the answer comes from; what it is: exact, published, computed
    runs : the models it takes
    measure : how the answer is compared
    allowed : per method, the largest deviation in per cent; other methods are not judged
    quick : part of the quick set
    """

    name: str
    source: str
    runs: tuple[Run, ...]
    measure: Measure
    allowed: Mapping[str, float]
    quick: bool = False


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the record: a method in a load of a case; `failure` where nothing came of it."""

    case: str
    source: str
    cells: str
    measured: Measured | None
    allowed: float
    seconds: float
    failure: str = ""

    @property
    def within(self) -> bool:
        """Whether the deviation is a number and is allowed."""
        return self.measured is not None and abs(self.measured.worst) <= self.allowed

    @property
    def verdict(self) -> str:
        if self.measured is None:
            return "failed"
        return "within" if self.within else "out"
