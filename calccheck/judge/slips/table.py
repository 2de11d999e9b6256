"""The table of slips: what each is called, the function that tries it, and how common it is."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Literal

from calccheck.judge.slips import (
    alternating,
    angles,
    combined,
    devices,
    digits,
    elsewhere,
    magnitudes,
    pairs,
    parts,
    sources,
    versions,
    working,
)  # fmt: skip
from calccheck.judge.slips.case import Case, Guess

Of = Literal["digits", "sources", "circuit", "working"]


@dataclass(frozen=True, slots=True)
class SlipKind:
    """One slip.

    ``key``: its fixed name in reports. ``common``: how often it is made, relative to the others (common practice, no count is
    published). ``of``: what it is a slip with. ``figures``: the fewest printed figures at which a fit says anything.
    """

    key: str
    common: float
    of: Of
    find: Callable[[Case], Iterator[Guess]]
    figures: int = 3


SLIPS: tuple[SlipKind, ...] = (
    SlipKind("sign", 1.0, "digits", digits.sign, 1),
    SlipKind("prefix", 1.0, "digits", digits.prefix, 1),
    SlipKind("decimal-point", 0.6, "digits", digits.decimal_point, 1),
    SlipKind("digits-swapped", 0.6, "digits", digits.digits_swapped),
    SlipKind("digit-slip", 0.6, "digits", digits.digit_slip, 4),
    SlipKind("reciprocal", 0.4, "digits", digits.reciprocal),
    SlipKind("factor-two", 0.4, "digits", digits.factor_two),
    SlipKind("percent", 0.8, "digits", digits.percent),
    SlipKind("source-missing", 0.6, "sources", sources.source_missing),
    SlipKind("source-reversed", 0.6, "sources", sources.source_reversed),
    SlipKind("source-twice", 0.2, "sources", sources.source_twice),
    SlipKind("source-zeroed-wrongly", 0.4, "sources", sources.source_zeroed_wrongly),
    SlipKind("controlled-source-zeroed", 0.6, "sources", sources.controlled_source_zeroed),
    SlipKind("power-superposed", 0.8, "sources", sources.power_superposed),
    SlipKind("swapped-values", 0.4, "circuit", parts.swapped_values),
    SlipKind("element-absent", 0.4, "circuit", parts.element_absent),
    SlipKind("element-shorted", 0.2, "circuit", parts.element_shorted),
    SlipKind("divider-complement", 0.6, "circuit", pairs.divider_complement),
    SlipKind("series-parallel", 0.4, "circuit", pairs.series_parallel),
    SlipKind("other-quantity", 0.6, "circuit", elsewhere.other_quantity),
    SlipKind("stale", 1.0, "circuit", versions.stale),
    SlipKind("neighbour-value", 0.2, "circuit", parts.neighbour_value),
    SlipKind("peak-rms", 0.8, "digits", alternating.peak_rms),
    SlipKind("degrees-radians", 0.6, "digits", angles.degrees_radians),
    SlipKind("omega-frequency", 0.8, "circuit", alternating.omega_frequency),
    SlipKind("magnitudes-added", 0.8, "circuit", magnitudes.magnitudes_added),
    SlipKind("conjugate", 1.0, "digits", alternating.conjugate),
    SlipKind("log-ten-twenty", 1.0, "digits", digits.log_ten_twenty),
    SlipKind("line-phase", 0.8, "digits", alternating.line_phase),
    SlipKind("drop-forgotten", 1.0, "circuit", devices.drop_forgotten),
    SlipKind("stage-kind", 0.8, "circuit", devices.stage_kind),
    SlipKind("tolerance-combined", 1.0, "circuit", combined.tolerance_combined),
    SlipKind("working-slip", 0.8, "working", working.working_slip, 1),
    SlipKind("early-rounding", 0.6, "working", working.early_rounding),
)
