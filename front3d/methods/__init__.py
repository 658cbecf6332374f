"""The methods by name: each takes a front and gives K at its stations, one result per step.

A new method is one file with an `evaluate` of this signature, and one line here.
"""

from collections.abc import Callable

from front3d.methods import closure, interaction, opening
from front3d.methods.context import FrontContext
from front3d.results import MethodResult

Method = Callable[[FrontContext], list[MethodResult]]

METHODS: dict[str, Method] = {
    "interaction": interaction.evaluate,
    "closure": closure.evaluate,
    "opening": opening.evaluate,
}

__all__ = ["METHODS", "FrontContext", "Method"]
