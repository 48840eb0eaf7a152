"""What counts where no profile says otherwise."""

from pydantic import TypeAdapter, ValidationError

from airfield_board.configuration.fields import ElevationFt
from airfield_board.configuration.file_models import ObservationsSection
from airfield_board.configuration.model import Instruments
from airfield_board.configuration.profile import instruments_of


def default_instruments() -> Instruments:
    """Return the resolutions and accuracies of a profile that states none."""
    return instruments_of(ObservationsSection(file="observations"))


def is_elevation_ft(elevation_ft: float) -> bool:
    """Whether a profile could give this elevation of an airfield [ft]."""
    try:
        TypeAdapter[float](ElevationFt).validate_python(elevation_ft)
    except ValidationError:
        return False
    return True
