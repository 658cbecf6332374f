"""Embedded models: parametric cracked solids, meshed, loaded and solved in the package."""

from front3d.samples.building import SAMPLES, build, build_from, sample_spec
from front3d.samples.cells import CELL_KINDS
from front3d.samples.parts import WHOLE
from front3d.samples.sample import Parameter, Sample, SampleSpec
from front3d.samples.writing import write_sample

__all__ = [
    "CELL_KINDS",
    "SAMPLES",
    "WHOLE",
    "Parameter",
    "Sample",
    "SampleSpec",
    "build",
    "build_from",
    "sample_spec",
    "write_sample",
]
