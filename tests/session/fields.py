"""An invented field for the tests of the session: its files, and rows for them."""

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from pathlib import Path

from airfield_board.clock import SteppedClock, iso_utc
from airfield_board.session.board_state import BoardState, Mode, OperationLine
from airfield_board.session.recorder import Recorder

PROFILE = """\
schema: 1
airfield:
  name: Thistle Bench
  elevation_ft: 4120
  time_zone: America/Los_Angeles
observations:
  file: observations.csv
  expected_every_min: 5
  stale_after_min: 15
density_altitude: dry
fleet: fleet.yaml
history: history.db
"""

FLEET = """\
schema: 1
aircraft:
  - id: trainer
    name: Two-seat trainer
    operations:
      - name: Departure
        max_density_altitude_ft: 6350
        basis: operator policy
  - id: tow
    name: Tow plane
    operations:
      - name: Aerotow
        max_density_altitude_ft:
          by_weight_lb: {1950: 7400, 2450: 6550}
"""

START = datetime(2026, 7, 14, 18, 0, tzinfo=UTC)
HEADER = "time,altimeter_hpa,temperature_c"


@dataclass(slots=True)
class Field:
    """The field's folder and clock.

    At 4,120 ft and 1013.25 hPa the dry air has 5,000 ft at about 14.7 °C, 6,350 ft at about 26.3 °C.
    """

    folder: Path
    clock: SteppedClock

    @property
    def profile(self) -> Path:
        return self.folder / "profile.yaml"

    @property
    def fleet(self) -> Path:
        return self.folder / "fleet.yaml"

    @property
    def observations(self) -> Path:
        return self.folder / "observations.csv"

    @property
    def history(self) -> Path:
        return self.folder / "history.db"

    def at(self, minutes: float) -> datetime:
        return START + timedelta(minutes=minutes)

    def row(self, minutes: float, temperature_c: float, altimeter_hpa: float = 1013.25) -> str:
        return f"{iso_utc(self.at(minutes))},{altimeter_hpa},{temperature_c}\n"

    def write(self, *rows: str) -> None:
        self.observations.write_text(f"{HEADER}\n" + "".join(rows), encoding="utf-8")

    def append(self, *rows: str) -> None:
        with self.observations.open("a", encoding="utf-8") as file:
            file.write("".join(rows))

    def move_to(self, minutes: float) -> None:
        self.clock.move_to(self.at(minutes))

    def open(self) -> Recorder:
        return Recorder.open(self.profile, clock=self.clock, mode=Mode.LIVE)


def make_field(folder: Path, *, profile: str = PROFILE, fleet: str = FLEET) -> Field:
    field = Field(folder, SteppedClock(START))
    field.profile.write_text(profile, encoding="utf-8")
    field.fleet.write_text(fleet, encoding="utf-8")
    return field


def row_of(state: BoardState, aircraft: str) -> OperationLine:
    (found,) = (row for row in state.operations if row.aircraft_id == aircraft)
    return found
