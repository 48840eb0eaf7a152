"""The keys of the profile and the fleet file, as they are written; what ties several keys together stands elsewhere."""

from typing import Annotated, Generic, TypeVar

from pydantic import Discriminator, Field, Tag

from airfield_board.configuration.fields import (
    BY_PRESSURE_ALTITUDE,
    BY_WEIGHT,
    AltimeterStepHpa,
    AltimeterStepInhg,
    AltitudeLimitFt,
    AltitudeLimitM,
    BandC,
    BandF,
    BandFt,
    BandM,
    Day,
    DeviationLimitC,
    ElevationFt,
    ElevationM,
    FilePath,
    FileSection,
    HistoryPlace,
    Identifier,
    Latitude,
    Longitude,
    Name,
    OffDelayMin,
    PeriodMin,
    PollSeconds,
    Remark,
    SchemaNumber,
    Station,
    TemperatureLimitC,
    TemperatureLimitF,
    TemperatureStepC,
    TimeZone,
)
from airfield_board.configuration.model import Acceptance, Basis, Humidity, Phase

NUMBER_TAG = "a number"
TABLE_TAG = "a table"

_Value = TypeVar("_Value")


class AirfieldSection(FileSection):
    """The airfield itself."""

    name: Name = Field(description="The airfield's name, as screens and reports show it.", examples=["Cinder Mesa"])
    elevation_ft: ElevationFt | None = Field(
        default=None, description="Field elevation in feet; or elevation_m.", examples=[4120]
    )
    elevation_m: ElevationM | None = Field(
        default=None, description="Field elevation in metres; or elevation_ft.", examples=[1256]
    )
    latitude: Latitude | None = Field(
        default=None, description="Degrees, north positive; with longitude.", examples=[41.2]
    )
    longitude: Longitude | None = Field(
        default=None, description="Degrees, east positive; with latitude.", examples=[-116.9]
    )
    time_zone: TimeZone = Field(
        description="Name of the airfield's time zone in the IANA time zone database.",
        examples=["America/Los_Angeles"],
    )


class ObservationsSection(FileSection):
    """Where observations come from, and how good they are."""

    file: FilePath = Field(
        description="The file of observations, relative to this file; it is never written to.",
        examples=["observations.csv"],
    )
    station: Station | None = Field(
        default=None, description="METAR only: reports of other stations are passed over.", examples=["ZZCM"]
    )
    note: Remark | None = Field(
        default=None, description="Shown with the source.", examples=["sensor at the north end of the field"]
    )
    time_zone: TimeZone | None = Field(
        default=None,
        description="Of times without an offset, where it is not the airfield's.",
        examples=["Etc/GMT+8"],
    )
    poll_s: PollSeconds = Field(default=5, description="Seconds between looks at the file.", examples=[5])
    expected_every_min: PeriodMin = Field(
        default=5, description="Minutes from one observation to the next.", examples=[5]
    )
    stale_after_min: PeriodMin = Field(
        default=15,
        description="Age in minutes above which an observation is no longer trusted; above expected_every_min.",
        examples=[15],
    )
    altimeter_resolution_inhg: AltimeterStepInhg | None = Field(
        default=None, description="Step of the altimeter setting in inHg (default 0.01).", examples=[0.01]
    )
    altimeter_resolution_hpa: AltimeterStepHpa | None = Field(
        default=None, description="Step of the altimeter setting in hPa.", examples=[0.1]
    )
    altimeter_accuracy_inhg: AltimeterStepInhg | None = Field(
        default=None,
        description="Accuracy of the altimeter setting in inHg, half-width at 95 % (default 0.02).",
        examples=[0.02],
    )
    altimeter_accuracy_hpa: AltimeterStepHpa | None = Field(
        default=None, description="Accuracy of the altimeter setting in hPa, half-width at 95 %.", examples=[0.5]
    )
    temperature_resolution_c: TemperatureStepC = Field(
        default=0.1, description="Step of the temperature in °C.", examples=[0.1]
    )
    temperature_accuracy_c: TemperatureStepC = Field(
        default=0.5, description="Accuracy of the temperature in °C, half-width at 95 %.", examples=[0.5]
    )
    dewpoint_resolution_c: TemperatureStepC = Field(
        default=0.1, description="Step of the dew point in °C.", examples=[0.1]
    )
    dewpoint_accuracy_c: TemperatureStepC = Field(
        default=1.0, description="Accuracy of the dew point in °C, half-width at 95 %.", examples=[1.0]
    )


class ProfileFile(FileSection):
    """An airfield profile."""

    schema_number: SchemaNumber = Field(alias="schema", description="Always 1.", examples=[1])
    airfield: AirfieldSection = Field(description="The airfield itself.")
    observations: ObservationsSection = Field(description="Where observations come from, and how good they are.")
    density_altitude: Humidity = Field(
        default="auto",
        description="Whether humidity counts: auto (from the first dew point on), moist (always), dry (never).",
        examples=["auto"],
    )
    acceptance: Acceptance = Field(
        default="simple",
        description="What is compared with a limit: simple (the value), guarded (value + uncertainty).",
        examples=["simple"],
    )
    fleet: FilePath = Field(description="The fleet file, relative to this file.", examples=["fleet.yaml"])
    history: HistoryPlace | None = Field(
        default=None,
        description="The history file, relative to this file, or sqlite:/// and its path; "
        "left out: in the user's data folder.",
        examples=["history.db"],
    )


class WeightTableKeys(FileSection, Generic[_Value]):
    """Limit by weight: at least two points, limits falling as weight rises, linear between, never beyond."""

    by_weight_lb: Annotated[dict[str, _Value], BY_WEIGHT] | None = Field(
        default=None, description="Limit by weight in lb, at least two points; limits fall as weight rises."
    )
    by_weight_kg: Annotated[dict[str, _Value], BY_WEIGHT] | None = Field(
        default=None, description="Limit by weight in kg, at least two points; limits fall as weight rises."
    )


class AltitudeTableFt(WeightTableKeys[AltitudeLimitFt]):
    """Altitude limit in feet by weight."""


class AltitudeTableM(WeightTableKeys[AltitudeLimitM]):
    """Altitude limit in metres by weight."""


class DeviationTableC(WeightTableKeys[DeviationLimitC]):
    """Limit on the ISA deviation by weight."""


class TemperatureTableC(WeightTableKeys[TemperatureLimitC]):
    """Temperature limit in °C by weight or by pressure altitude."""

    by_pressure_altitude_ft: Annotated[dict[str, TemperatureLimitC], BY_PRESSURE_ALTITUDE] | None = Field(
        default=None, description="Limit by pressure altitude in ft, at least two points."
    )


class TemperatureTableF(WeightTableKeys[TemperatureLimitF]):
    """Temperature limit in °F by weight or by pressure altitude."""

    by_pressure_altitude_ft: Annotated[dict[str, TemperatureLimitF], BY_PRESSURE_ALTITUDE] | None = Field(
        default=None, description="Limit by pressure altitude in ft, at least two points."
    )


def _number_or_table(value: object) -> str:
    return TABLE_TAG if isinstance(value, dict) else NUMBER_TAG


AltitudeFt = Annotated[
    Annotated[AltitudeLimitFt, Tag(NUMBER_TAG)] | Annotated[AltitudeTableFt, Tag(TABLE_TAG)],
    Discriminator(_number_or_table),
]
AltitudeM = Annotated[
    Annotated[AltitudeLimitM, Tag(NUMBER_TAG)] | Annotated[AltitudeTableM, Tag(TABLE_TAG)],
    Discriminator(_number_or_table),
]
TemperatureC = Annotated[
    Annotated[TemperatureLimitC, Tag(NUMBER_TAG)] | Annotated[TemperatureTableC, Tag(TABLE_TAG)],
    Discriminator(_number_or_table),
]
TemperatureF = Annotated[
    Annotated[TemperatureLimitF, Tag(NUMBER_TAG)] | Annotated[TemperatureTableF, Tag(TABLE_TAG)],
    Discriminator(_number_or_table),
]
DeviationC = Annotated[
    Annotated[DeviationLimitC, Tag(NUMBER_TAG)] | Annotated[DeviationTableC, Tag(TABLE_TAG)],
    Discriminator(_number_or_table),
]


class BandsSection(FileSection):
    """How near is near, and when a hold ends."""

    near_band_ft: BandFt | None = Field(
        default=None, description="Within this of an altitude limit is NEAR LIMIT [ft] (500).", examples=[500]
    )
    near_band_m: BandM | None = Field(
        default=None, description="Within this of an altitude limit is NEAR LIMIT [m].", examples=[150]
    )
    near_band_c: BandC | None = Field(
        default=None,
        description="Within this of a temperature or ISA deviation limit is NEAR LIMIT [°C] (3).",
        examples=[3],
    )
    near_band_f: BandF | None = Field(
        default=None,
        description="Within this of a temperature or ISA deviation limit is NEAR LIMIT [°F, a difference].",
        examples=[5],
    )
    deadband_ft: BandFt | None = Field(
        default=None, description="How far below an altitude limit a hold ends [ft] (150).", examples=[150]
    )
    deadband_m: BandM | None = Field(
        default=None, description="How far below an altitude limit a hold ends [m].", examples=[50]
    )
    deadband_c: BandC | None = Field(
        default=None,
        description="How far below a temperature or ISA deviation limit a hold ends [°C] (0.5).",
        examples=[0.5],
    )
    deadband_f: BandF | None = Field(
        default=None,
        description="How far below a temperature or ISA deviation limit a hold ends [°F, a difference].",
        examples=[1],
    )
    off_delay_min: OffDelayMin | None = Field(
        default=None, description="Minutes below limit - deadband before a hold ends (10).", examples=[10]
    )


class OperationSection(BandsSection):
    """One entry of an operation: its limits, and the days on which they count."""

    name: Name = Field(
        description="The operation's name; entries of one aircraft with one name are one operation.",
        examples=["Departure"],
    )
    phase: Phase | None = Field(
        default=None, description="departure (where nothing is said), arrival or local.", examples=["departure"]
    )
    max_density_altitude_ft: AltitudeFt | None = Field(
        default=None, description="Greatest density altitude [ft], a number or a table.", examples=[6350]
    )
    max_density_altitude_m: AltitudeM | None = Field(
        default=None, description="Greatest density altitude [m], a number or a table.", examples=[1900]
    )
    max_pressure_altitude_ft: AltitudeFt | None = Field(
        default=None, description="Greatest pressure altitude [ft], a number or a table.", examples=[8000]
    )
    max_pressure_altitude_m: AltitudeM | None = Field(
        default=None, description="Greatest pressure altitude [m], a number or a table.", examples=[2400]
    )
    max_temperature_c: TemperatureC | None = Field(
        default=None, description="Greatest temperature [°C], a number or a table.", examples=[45]
    )
    max_temperature_f: TemperatureF | None = Field(
        default=None, description="Greatest temperature [°F], a number or a table.", examples=[110]
    )
    max_isa_deviation_c: DeviationC | None = Field(
        default=None,
        description="Greatest difference from the standard temperature at the pressure altitude [°C], "
        "a number or a table.",
        examples=[30],
    )
    acceptance: Acceptance | None = Field(
        default=None,
        description="simple or guarded (value + uncertainty is compared), where not as in the profile.",
        examples=["guarded"],
    )
    basis: Basis | None = Field(
        default=None,
        description="What the limit rests on: flight manual, operator policy or local order.",
        examples=["operator policy"],
    )
    source: Remark | None = Field(
        default=None, description="Where the limit stands.", examples=["Operations manual 4.2"]
    )
    notice: Remark | None = Field(
        default=None, description="The notice that brought the limit.", examples=["Local order 7"]
    )
    valid_from: Day | None = Field(
        default=None, description="First local day on which the entry counts.", examples=["2026-06-01"]
    )
    valid_until: Day | None = Field(
        default=None, description="Last local day on which the entry counts.", examples=["2026-09-30"]
    )


class AircraftSection(FileSection):
    """A type, or one airframe."""

    id: Identifier = Field(
        description="Names the aircraft in records and files: letters, digits, '-', '_' and '.'.",
        examples=["trainer-2"],
    )
    name: Name | None = Field(
        default=None, description="As the board shows it; the id where left out.", examples=["Two-seat trainer"]
    )
    group: Remark | None = Field(default=None, description="Who flies it.", examples=["Flying school"])
    operations: list[OperationSection] = Field(
        min_length=1, description="What it does, each with its limits; at least one."
    )


class FleetFile(FileSection):
    """A fleet: the aircraft and their limits."""

    schema_number: SchemaNumber = Field(alias="schema", description="Always 1.", examples=[1])
    defaults: BandsSection | None = Field(
        default=None, description="Bands and off-delay of all operations that do not give their own."
    )
    aircraft: list[AircraftSection] = Field(min_length=1, description="The aircraft; at least one.")
