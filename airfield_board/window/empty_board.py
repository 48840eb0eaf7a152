"""The board as it is drawn before there is an airfield: axes and clock, no rows, NO DATA."""

from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.clock import local_day, start_of_local_day, us_from_time
from airfield_board.configuration.defaults import default_instruments
from airfield_board.session.board_state import AirfieldLine, BoardState, DayCurve, Mode


def empty_board(airfield: AirfieldLine, now: datetime) -> BoardState:
    """Return a board without rows and without an observation.

    Parameters
    ----------
    airfield
        What is known of it.
    now
        Aware.
    """
    zone = ZoneInfo(airfield.time_zone)
    day = local_day(now, zone)
    nothing = np.array([], dtype=np.float64)
    return BoardState(
        mode=Mode.LIVE,
        airfield=airfield,
        instruments=default_instruments(),
        guarded=False,
        assessed_at=now,
        observation=None,
        conditions=None,
        stale_after_min=15.0,
        ageing_after_min=10.0,
        aircraft=(),
        operations=(),
        curve=DayCurve(
            time_us=np.array([], dtype=np.int64),
            density_altitude_ft=nothing,
            uncertainty_ft=nothing,
            day_start_us=us_from_time(start_of_local_day(day, zone)),
            day_end_us=us_from_time(start_of_local_day(day + timedelta(days=1), zone)),
        ),
    )
