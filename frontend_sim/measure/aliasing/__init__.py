"""What the rate of the converter folds down: lines, bands, and the error that they make."""

from frontend_sim.measure.aliasing.alias import Alias, folded_band
from frontend_sim.measure.aliasing.aliasing import Aliasing, alias_error, aliasing_of
from frontend_sim.measure.aliasing.error import AliasError
from frontend_sim.measure.aliasing.recorded import sampled_alias_error
from frontend_sim.measure.aliasing.split import part_above

__all__ = [
    "Alias",
    "AliasError",
    "Aliasing",
    "alias_error",
    "aliasing_of",
    "folded_band",
    "part_above",
    "sampled_alias_error",
]
