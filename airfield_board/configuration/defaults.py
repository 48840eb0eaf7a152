"""What counts where no profile says otherwise."""

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.fields import HIGHEST_ELEVATION_FT, LOWEST_ELEVATION_FT
from airfield_board.configuration.file_models import ObservationsSection
from airfield_board.configuration.model import Instruments
from airfield_board.configuration.profile import instruments_of


def default_instruments() -> Instruments:
    """Return the resolutions and accuracies of a profile that states none."""
    return instruments_of(ObservationsSection(file="observations"))


def is_elevation_ft(elevation_ft: float) -> bool:
    """Whether a profile could give this elevation of an airfield [ft]."""
    return bool(are_elevations_ft(np.array(elevation_ft)))


def are_elevations_ft(elevation_ft: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Which of these a profile could give as the elevation of an airfield [ft], of any shape; NaN it could not."""
    return (elevation_ft >= LOWEST_ELEVATION_FT) & (elevation_ft <= HIGHEST_ELEVATION_FT)
