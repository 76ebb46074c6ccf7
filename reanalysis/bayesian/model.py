"""The bambi model of a design, compiled once for each structure and rebound to data and priors.

Compilation is what costs: seconds, against a tenth of a second of sampling. bambi
bakes data and hyperparameters into the graph as constants. Here the priors'
hyperparameters reach the graph as one shared vector, and matrix, outcome and
offset are replaced by shared variables after the model is built, so that one
compiled model serves every prior set and every study of the same structure.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import bambi as bmb
import numpy as np
import nutpie
import pandas as pd
import pymc as pm
import pytensor
import pytensor.tensor as pt
from numpy.typing import NDArray
from pymc.distributions.transforms import log as log_transform
from pymc.logprob.transforms import Transform
from pymc.model.fgraph import fgraph_from_model, model_from_fgraph
from pytensor.graph.fg import FunctionGraph
from pytensor.graph.replace import clone_replace
from pytensor.tensor.variable import TensorConstant

from reanalysis.bayesian.packing import WIDTH, Slot, Support
from reanalysis.errors import FitError, Problem
from reanalysis.families import Family

FloatArray = NDArray[np.float64]

COEFFICIENTS = "columns(c0)"
"""bambi's name for the one term that holds all columns."""

INTERCEPT = "Intercept"
"""bambi's name for a constant column that stands alone; as a term of ours it would be refused."""

_SLOT = {slot: position for position, slot in enumerate(Slot)}


@dataclass(frozen=True, slots=True)
class Structure:
    """All that a compiled model depends on; data and hyperparameters are not among it.

    Attributes
    ----------
    family : Family
    columns : int
        Columns of the matrix, the intercept's included.
    offset : bool
    bounded : bool
        Whether a coefficient's prior lives on a half line or an interval.
    constant : bool
        Whether the intercept is the only column; the graph then holds no matrix.
    """

    family: Family
    columns: int
    offset: bool
    bounded: bool
    constant: bool

    @property
    def term(self) -> str:
        """Bambi's name for the coefficients."""
        return INTERCEPT if self.constant else COEFFICIENTS

    def prior_rows(self, rows: Any) -> dict[str, Any]:
        """The rows of packed priors by bambi's names, from an array of shape (k + a, 13)."""
        named = {self.term: rows[0] if self.constant else rows[: self.columns]}
        if self.family.auxiliary is not None:
            named[self.family.auxiliary] = rows[self.columns]
        return named


@dataclass(frozen=True, slots=True)
class Inputs:
    """What a compiled model is bound to, on the sampler's scale.

    Attributes
    ----------
    matrix : ndarray, shape (n, k)
    response : ndarray, shape (n,)
    offset : ndarray, shape (n,), or None
    priors : ndarray, shape (k + a, 13)
        Packed priors of the coefficients, then of the auxiliary parameters.
    """

    matrix: FloatArray
    response: FloatArray
    offset: FloatArray | None
    priors: FloatArray


@dataclass(frozen=True, slots=True)
class CompiledModel:
    """A compiled model and how to rebind it."""

    structure: Structure
    compiled: Any
    response_dtype: np.dtype[Any]

    def bind(self, inputs: Inputs) -> Any:
        """Return nutpie's model for these data and priors; nothing is compiled."""
        values: dict[str, NDArray[Any]] = {
            "response": inputs.response.astype(self.response_dtype),
            "priors": inputs.priors.ravel(),
        }
        if not self.structure.constant:
            values["matrix"] = inputs.matrix
        if inputs.offset is not None:
            values["offset"] = inputs.offset
        return self.compiled.with_data(**values)


def compile_model(structure: Structure, inputs: Inputs) -> CompiledModel:
    """Build the bambi model of these inputs, check it, share its data and compile it.

    Raises
    ------
    FitError
        When bambi's matrix, outcome, offset or priors are not those that were asked for.
    """
    priors = pytensor.shared(inputs.priors.ravel(), name="priors")
    model = build_model(structure, inputs, priors)
    check_model(model, structure, inputs, priors)
    shared = _share_data(model.backend.model, structure, inputs)
    names = [variable.name for variable in shared.free_RVs]
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # numba on caching, of no concern to a reader
        compiled = nutpie.compile_pymc_model(shared, var_names=names)
    dtype = shared.rvs_to_values[shared[_RESPONSE]].dtype
    return CompiledModel(structure, compiled, np.dtype(dtype))


_RESPONSE = "y"


def build_model(structure: Structure, inputs: Inputs, priors: Any) -> bmb.Model:
    """Build bambi's model with an explicit prior for every column.

    All columns, the intercept's ones among them, enter as one matrix term: their number then
    costs no compile time, and bambi neither centres nor renames anything.
    """
    domain = _ANYWHERE if structure.bounded else _WHOLE_LINE
    kinds = {
        name: _PackedPrior(row, domain if name == structure.term else _HALF_LINE)
        for name, row in structure.prior_rows(priors.reshape((-1, WIDTH))).items()
    }
    data = pd.DataFrame({_RESPONSE: inputs.response, "c0": 0.0})
    formula = f"{_RESPONSE} ~ 1" if structure.constant else f"{_RESPONSE} ~ 0 + columns(c0)"
    if inputs.offset is not None:
        data["exposed"] = inputs.offset
        formula += " + offset(exposed)"
    model = bmb.Model(
        formula,
        data,
        family=structure.family.bambi_family,
        link=structure.family.link if structure.family.auxiliary is None else None,
        priors={name: bmb.Prior(f"Packed_{i}", dist=kind) for i, (name, kind) in enumerate(kinds.items())},
        center_predictors=False,
        extra_namespace={"columns": lambda _: inputs.matrix},
    )
    model.build()
    return model


def check_model(model: bmb.Model, structure: Structure, inputs: Inputs, priors: Any) -> None:
    """Compare what bambi built with what was asked, before anything is sampled.

    Raises
    ------
    FitError
        When they differ. This is a defect of the program, not of the user's input.
    """
    graph = model.backend.model
    design = np.asarray(model.parameters[_parent(structure.family)].design.common)
    expected = {"matrix": (design[:, : structure.columns], inputs.matrix)}
    expected["outcome"] = (np.asarray(graph.rvs_to_values[graph[_RESPONSE]].data), inputs.response)
    asked = structure.prior_rows(inputs.priors.reshape((-1, WIDTH)))
    for name, row in asked.items():
        expected[f"prior of {name}"] = (_hyperparameters(graph[name]), row)
    wrong = [what for what, (got, want) in expected.items() if not np.array_equal(got, want)]
    free = {variable.name for variable in graph.free_RVs}
    if free != set(asked):
        wrong.append(f"parameters {sorted(free)}")
    if wrong or not np.array_equal(priors.get_value(), inputs.priors.ravel()):
        raise FitError(
            Problem(
                where="Bayesian model",
                found=f"bambi built another model than the one asked for ({', '.join(wrong)})",
                allowed="",
                advice="report this as a defect, with the study file",
            )
        )


def _parent(family: Family) -> str:
    return {"gaussian": "mu", "bernoulli": "p", "poisson": "mu"}[family.name]


def _hyperparameters(variable: Any) -> FloatArray:
    return np.asarray(variable.owner.inputs[-1].eval(), dtype=np.float64)


@dataclass(frozen=True, slots=True)
class _Domain:
    """Density, transform and starting point of parameters that live on one kind of set."""

    density: Callable[[Any, Any], Any]
    transform: Transform | None
    start: Callable[[Any, Any, Any], Any]


class _PackedPrior:
    """A prior distribution whose hyperparameters are rows of a shared vector."""

    def __init__(self, rows: Any, domain: _Domain) -> None:
        self.rows = rows
        self.domain = domain

    def __deepcopy__(self, memo: Mapping[int, object]) -> _PackedPrior:
        # bambi copies priors deeply; a copy of the shared vector could never be rebound.
        return self

    def __call__(self, name: str, **place: Any) -> Any:
        return pm.CustomDist(
            name,
            self.rows,
            logp=self.domain.density,
            support_point=self.domain.start,
            signature="(p)->()",
            default_transform=self.domain.transform,
            dims=place.get("dims"),
        )


def _cell(row: Any, slot: Slot) -> Any:
    return row[..., _SLOT[slot]]


def _real_density(value: Any, row: Any) -> Any:
    z = (value - _cell(row, Slot.LOCATION)) / _cell(row, Slot.SCALE)
    tails = _cell(row, Slot.H) * pt.log1p(z**2 / _cell(row, Slot.DF))
    return -0.5 * _cell(row, Slot.Q) * z**2 - tails - _cell(row, Slot.L) * pt.abs(z)


def _positive_density(value: Any, row: Any) -> Any:
    log_value = pt.log(value)
    lognormal = 0.5 * _cell(row, Slot.R) * (log_value - _cell(row, Slot.M)) ** 2
    gamma = _cell(row, Slot.A) * log_value - _cell(row, Slot.B) * value
    return _real_density(value, row) + gamma - lognormal


def _any_density(value: Any, row: Any) -> Any:
    # The inner switch keeps the logarithm of a negative number out of the gradient.
    is_positive = pt.eq(_cell(row, Slot.SUPPORT), Support.POSITIVE)
    positive = pt.switch(is_positive, value, 1.0)
    return pt.switch(is_positive, _positive_density(positive, row), _real_density(value, row))


def _real_start(rv: Any, size: Any, row: Any) -> Any:  # noqa: ARG001
    return _cell(row, Slot.LOCATION)


def _positive_start(rv: Any, size: Any, row: Any) -> Any:  # noqa: ARG001
    return pt.ones_like(_cell(row, Slot.LOCATION))


def _any_start(rv: Any, size: Any, row: Any) -> Any:  # noqa: ARG001
    kind = _cell(row, Slot.SUPPORT)
    interval = (_cell(row, Slot.LOW) + _cell(row, Slot.HIGH)) / 2.0
    return pt.switch(
        pt.eq(kind, Support.POSITIVE),
        1.0,
        pt.switch(pt.eq(kind, Support.INTERVAL), interval, _cell(row, Slot.LOCATION)),
    )


class _SupportTransform(Transform):  # type: ignore[misc]
    """Unconstrained scale of each parameter by its support: identity, logarithm, or scaled logit."""

    name = "support"

    def forward(self, value: Any, *inputs: Any) -> Any:
        row = inputs[-1]
        kind, low, high = (_cell(row, slot) for slot in (Slot.SUPPORT, Slot.LOW, Slot.HIGH))
        positive = pt.log(pt.switch(pt.eq(kind, Support.POSITIVE), value, 1.0))
        share = pt.switch(pt.eq(kind, Support.INTERVAL), (value - low) / (high - low), 0.5)
        interval = pt.log(share) - pt.log1p(-share)
        return self._choose(kind, value, positive, interval)

    def backward(self, value: Any, *inputs: Any) -> Any:
        row = inputs[-1]
        kind, low, high = (_cell(row, slot) for slot in (Slot.SUPPORT, Slot.LOW, Slot.HIGH))
        positive = pt.exp(pt.switch(pt.eq(kind, Support.POSITIVE), value, 0.0))
        interval = low + (high - low) * pt.sigmoid(value)
        return self._choose(kind, value, positive, interval)

    def log_jac_det(self, value: Any, *inputs: Any) -> Any:
        row = inputs[-1]
        kind, low, high = (_cell(row, slot) for slot in (Slot.SUPPORT, Slot.LOW, Slot.HIGH))
        interval = pt.log(high - low) - pt.softplus(-value) - pt.softplus(value)
        return self._choose(kind, pt.zeros_like(value), value, interval)

    @staticmethod
    def _choose(kind: Any, real: Any, positive: Any, interval: Any) -> Any:
        return pt.switch(
            pt.eq(kind, Support.POSITIVE), positive, pt.switch(pt.eq(kind, Support.INTERVAL), interval, real)
        )


_WHOLE_LINE = _Domain(_real_density, None, _real_start)
_HALF_LINE = _Domain(_positive_density, log_transform, _positive_start)
_ANYWHERE = _Domain(_any_density, _SupportTransform(), _any_start)


def _share_data(model: pm.Model, structure: Structure, inputs: Inputs) -> pm.Model:
    """Replace the constants that hold matrix, outcome and offset by shared variables of those names."""
    graph, _ = fgraph_from_model(model)
    observed = np.asarray(model.rvs_to_values[model[_RESPONSE]].data)
    wanted: dict[str, NDArray[Any]] = {"response": observed}
    if not structure.constant:
        wanted["matrix"] = inputs.matrix
    if inputs.offset is not None:
        wanted["offset"] = inputs.offset
    replacements: dict[Any, Any] = {}
    for variable in graph.variables:
        if isinstance(variable, TensorConstant):
            for name, array in wanted.items():
                # An outcome of counts may equal the offset, but not in its type.
                same_kind = variable.data.dtype == array.dtype and variable.data.shape == array.shape
                if same_kind and np.array_equal(variable.data, array):
                    replacements[variable] = pytensor.shared(variable.data, name=name)
    missing = sorted(set(wanted) - {shared.name for shared in replacements.values()})
    if missing or len(replacements) != len(wanted):
        raise FitError(
            Problem(
                where="Bayesian model",
                found=f"could not find {', '.join(missing) or 'distinct data'} in bambi's graph",
                allowed="",
                advice="report this as a defect, with the study file",
            )
        )
    outputs = clone_replace(graph.outputs, replace=replacements, rebuild_strict=False)
    rebuilt = FunctionGraph(outputs=outputs, clone=False)
    rebuilt._coords, rebuilt._dim_lengths = graph._coords, graph._dim_lengths
    return model_from_fgraph(rebuilt, mutate_fgraph=True)


Compiler = Callable[[Structure, Inputs], CompiledModel]


class ModelStore:
    """Compiled models by structure, so that a process compiles each structure once."""

    def __init__(self, compiler: Compiler = compile_model) -> None:
        self._compiler = compiler
        self._models: dict[Structure, CompiledModel] = {}

    def get(self, structure: Structure, inputs: Inputs) -> CompiledModel:
        """Return the compiled model of a structure, compiling it on first use."""
        if structure not in self._models:
            self._models[structure] = self._compiler(structure, inputs)
        return self._models[structure]
