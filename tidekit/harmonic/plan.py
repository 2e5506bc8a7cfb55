"""What is fitted: mean level, trend, constituents, and the companions that are tied to them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from tidekit.constituents.catalogue import resolve, resolve_names, speeds_deg_per_h
from tidekit.constituents.constants import NodalConvention
from tidekit.constituents.modulation import carriers
from tidekit.constituents.resolution import Companion, equilibrium_companions, resolvable
from tidekit.errors import AnalysisError
from tidekit.harmonic.columns import HOURS_PER_YEAR, Columns, Complex, Float
from tidekit.harmonic.minor import MinorGroup, minor_carriers, minor_groups, minor_speeds_deg_per_h
from tidekit.harmonic.normal import mixing_matrix


@dataclass(frozen=True, kw_only=True)
class Plan:
    """Parameters of a fit: mean, trend where asked for, and two for each fitted constituent."""

    fitted: tuple[str, ...]
    """Constituents with parameters of their own."""
    companions: tuple[Companion, ...] = ()
    """Constituents tied to fitted ones."""
    minor: tuple[MinorGroup, ...] = ()
    """Minor lines of the potential that follow fitted constituents; they are not in the constants."""
    trend: bool = False
    """Whether a linear trend is fitted."""
    nodal: NodalConvention = "exact"
    """Nodal convention."""

    @classmethod
    def of(
        cls,
        constituents: Sequence[str] | None,
        infer: Sequence[Companion] | None,
        *,
        span_h: float,
        step_h: float,
        trend: bool = False,
        nodal: NodalConvention = "exact",
    ) -> Plan:
        """Settle what is fitted; by default what a record of this length can tell apart, and its companions.

        Raises
        ------
        AnalysisError
            If the record is too short, or a companion is fitted too or has nothing to be tied to.
        ConstituentError
            If a name is unknown.
        """
        if constituents is None:
            fitted = resolvable(span_h, step_h=step_h)
            companions = tuple(equilibrium_companions(fitted, span_h) if infer is None else infer)
        else:
            fitted, companions = resolve_names(constituents), tuple(infer or ())
        inferred = resolve_names(companion.name for companion in companions)
        both = sorted(set(inferred) & set(fitted))
        orphans = [companion.name for companion in companions if companion.from_name not in fitted]
        if both:
            message = f"{', '.join(both)} both fitted and inferred; choose one"
            raise AnalysisError(message)
        if orphans:
            message = f"{', '.join(orphans)} inferred from constituents that are not fitted; fit those too"
            raise AnalysisError(message)
        # Agencies' constants are made without minor lines, and so are fits to constituents asked for by name.
        by_default = constituents is None and infer is None and nodal == "exact"
        minor = minor_groups((*fitted, *inferred), fitted) if by_default else ()
        return cls(fitted=fitted, companions=companions, minor=minor, trend=trend, nodal=nodal)

    @cached_property
    def names(self) -> tuple[str, ...]:
        """All constituents, fitted and inferred, in order of speed."""
        everything = (*self.fitted, *(companion.name for companion in self.companions))
        return tuple(sorted(everything, key=lambda name: resolve(name).speed_deg_per_h))

    @cached_property
    def inferred(self) -> NDArray[np.bool_]:
        """Which of `names` are inferred."""
        return np.array([name not in self.fitted for name in self.names], dtype=np.bool_)

    @cached_property
    def source(self) -> NDArray[np.int64]:
        """Place among the fitted ones of what each of `names` follows: itself or its main constituent."""
        main = {companion.name: companion.from_name for companion in self.companions}
        return np.array([self.fitted.index(main.get(name, name)) for name in self.names], dtype=np.int64)

    @cached_property
    def ratio(self) -> Complex:
        """Phasor of each of `names` over that of its `source`."""
        ratio = {companion.name: companion.ratio_to_main for companion in self.companions}
        return np.array([ratio.get(name, 1.0) for name in self.names], dtype=np.complex128)

    @property
    def flat(self) -> int:
        """Number of parameters before the constituents': mean level and trend."""
        return 1 + self.trend

    @cached_property
    def mixing(self) -> Float:
        """See `mixing_matrix`."""
        source = np.concatenate([self.source, [self.fitted.index(group.main) for group in self.minor]]).astype(np.int64)
        tie = np.zeros((len(source), len(self.fitted)), dtype=np.complex128)
        tie[np.arange(len(source)), source] = np.concatenate([self.ratio, np.ones(len(self.minor))])
        return mixing_matrix(tie, self.flat)

    @cached_property
    def parameter_names(self) -> tuple[str, ...]:
        """Names of the real parameters."""
        parts = [f"{name} {part}" for part in ("re", "im") for name in self.fitted]
        return ("mean", "trend")[: self.flat] + tuple(parts)

    @cached_property
    def fitted_speeds_deg_per_h(self) -> Float:
        """Speed of each fitted constituent. [degrees per hour]"""
        return speeds_deg_per_h(self.fitted)

    def columns(self, reference_h: float) -> Columns:
        """The complex columns, the trend being zero at a time."""
        about = (reference_h,) if self.trend else ()
        turn = np.concatenate([np.zeros(self.flat), *(np.deg2rad(speeds) for speeds in self._all_speeds)])

        def at(t_h: Float) -> Complex:
            flat = [np.ones((len(t_h), 1)), *((t_h[:, None] - zero) / HOURS_PER_YEAR for zero in about)]
            return np.hstack([*flat, carriers(self.names, t_h, nodal=self.nodal), minor_carriers(self.minor, t_h)])

        return Columns(turn, at, yearly_jumps=self.nodal != "exact")

    @cached_property
    def _all_speeds(self) -> tuple[Float, Float]:
        return speeds_deg_per_h(self.names), minor_speeds_deg_per_h(self.minor)
