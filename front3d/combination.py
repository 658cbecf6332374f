"""Linear combinations of load cases, as a person writes them: "both = 1.2*pressure + 0.8*thermal".

A term is a step, or a factor, a star and a step.  Around a minus between terms stand blanks, since
names of steps may hold one; a name with a plus, a star or an equals sign in it, or with blanks at
its ends, stands in double quotes.
"""

import re
from dataclasses import dataclass
from math import isfinite

from front3d.errors import CaseError

_NUMBER = r"(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?"
_TERM = re.compile(
    rf"""\s*(?P<sign>[+-])?\s*
    (?:(?P<factor>{_NUMBER})\s*\*\s*)?
    (?:"(?P<quoted>[^"]*)"|(?P<plain>[^\s+*="](?:[^+*="]*?[^\s+*="])??))
    \s*(?=$|\+|(?<=["\s])-\s)""",
    re.VERBOSE,
)
_EXPECTED = 'expected such as "both = 1.2*pressure + 0.8*thermal"'


@dataclass(frozen=True, slots=True)
class Combination:
    """A step that is a sum of others: its name, and the factor of each of them."""

    name: str
    factors: tuple[tuple[str, float], ...]

    @classmethod
    def parse(cls, text: str) -> "Combination":
        """Read "NAME = FACTOR*STEP + ..."; CaseError where it is not one."""
        name, equals, rest = text.partition("=")
        name = name.strip().strip('"').strip()
        if not equals or not name or not rest.strip():
            raise CaseError(f"combination: found {text!r}, {_EXPECTED}")
        factors: dict[str, float] = {}
        place = 0
        while place < len(rest.rstrip()):
            term = _TERM.match(rest, place)
            if term is None or (place and not term["sign"]):
                raise CaseError(
                    f"combination {name}: cannot read {rest[place:].strip()!r}, {_EXPECTED}; "
                    "blanks around a minus, double quotes around a name with + * or = in it"
                )
            step = term["plain"] if term["quoted"] is None else term["quoted"]
            factor = float((term["sign"] or "") + (term["factor"] or "1"))
            if not isfinite(factor):
                raise CaseError(f"combination {name}: found the factor {factor} of {step}")
            factors[step] = factors.get(step, 0.0) + factor
            place = term.end()
        if not any(factors.values()):
            raise CaseError(f"combination {name}: all factors are nought, expected some other")
        return cls(name, tuple(factors.items()))


def parse_all(texts: tuple[str, ...]) -> tuple[Combination, ...]:
    """Several combinations; CaseError where two have one name."""
    found = tuple(Combination.parse(text) for text in texts)
    names = [one.name for one in found]
    twice = next((name for name in names if names.count(name) > 1), None)
    if twice is not None:
        raise CaseError(f"combination {twice}: found it twice, expected names of their own")
    return found
