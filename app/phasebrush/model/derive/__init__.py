"""Pure functions from the record and the sums to the results."""

from phasebrush.model.derive.at_spot import derive_dial, derive_readout, find_circles, spot_phases
from phasebrush.model.derive.averages import average_limit, derive_average, derive_averages
from phasebrush.model.derive.maps import (
    band_rows,
    derive_maps,
    derive_set_maps,
    derive_traces,
    map_limits,
    shown_set,
)
from phasebrush.model.derive.order import derive_key, derive_rows, derive_stack
from phasebrush.model.derive.outlines import derive_outlines
from phasebrush.model.derive.rules import check_rules, default_channel

__all__ = [
    "average_limit",
    "band_rows",
    "check_rules",
    "default_channel",
    "derive_average",
    "derive_averages",
    "derive_dial",
    "derive_key",
    "derive_maps",
    "derive_outlines",
    "derive_readout",
    "derive_rows",
    "derive_set_maps",
    "derive_stack",
    "derive_traces",
    "find_circles",
    "map_limits",
    "shown_set",
    "spot_phases",
]
