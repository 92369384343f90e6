"""What a user can do to the clouds that were measured along a ramp: plans in, plans out."""

from __future__ import annotations

from dataclasses import replace
from enum import Enum

from app.answers.ramp_inputs import measured_clouds
from app.plan import Plan
from app.ramp_choices import MeasuredChoice
from app.units import CLOUD_WIDTH, TIME, Quantity, quantity, read_quantity


class Where(Enum):
    """Where a cloud was measured: in the trap before the ramp, after a stage, or at a time of the ramp."""

    START = "start"
    STAGE = "stage"
    TIME = "time"


class By(Enum):
    """How its temperature is known."""

    TEMPERATURE = "T"
    WIDTHS = "widths"


def where_of(cloud: MeasuredChoice) -> Where:
    if cloud.stage is not None:
        return Where.STAGE
    return Where.START if cloud.time is None else Where.TIME


def by_of(cloud: MeasuredChoice) -> By:
    return By.TEMPERATURE if cloud.temperature is not None else By.WIDTHS


def with_cloud(plan: Plan, number: int, cloud: MeasuredChoice) -> Plan:
    """The plan with another measured cloud in the place of one."""
    return replace(plan, measured=(*plan.measured[:number], cloud, *plan.measured[number + 1 :]))


def without_cloud(plan: Plan, number: int) -> Plan:
    """The plan without a measured cloud."""
    return replace(plan, measured=(*plan.measured[:number], *plan.measured[number + 1 :]))


def with_new_cloud(plan: Plan, atoms: Quantity, temperature: Quantity) -> Plan:
    """The plan with one more cloud, measured after its last stage; numbers that are still to be corrected."""
    taken = {cloud.label for cloud in plan.measured}
    number = next(k for k in range(1, len(taken) + 2) if f"cloud {k}" not in taken)
    cloud = MeasuredChoice(label=f"cloud {number}", stage=len(plan.ramp) or None, atoms=atoms, temperature=temperature)
    return replace(plan, measured=(*plan.measured, cloud))


def placed(cloud: MeasuredChoice, where: Where, stages: int) -> MeasuredChoice:
    """The cloud, measured elsewhere along a ramp of so many stages."""
    if where is Where.STAGE:
        return replace(cloud, stage=min(cloud.stage or stages, stages) or 1, time=None)
    if where is Where.TIME:
        return replace(cloud, stage=None, time=cloud.time or read_quantity("1 s", TIME))
    return replace(cloud, stage=None, time=None)


def known_by(cloud: MeasuredChoice, by: By, temperature: Quantity) -> MeasuredChoice:
    """The cloud, its temperature given, or by a width after an expansion."""
    if by is by_of(cloud):
        return cloud
    if by is By.TEMPERATURE:
        return replace(cloud, temperature=cloud.temperature or temperature, widths=(), expansion_time=None)
    return replace(
        cloud,
        temperature=None,
        widths=cloud.widths or (quantity(1e-4, "µm", kind=CLOUD_WIDTH),),
        expansion_time=cloud.expansion_time or read_quantity("15 ms", TIME),
    )


def with_width(cloud: MeasuredChoice, axis: int, width: Quantity | None) -> MeasuredChoice:
    """The cloud with another width along an axis; without one, those behind it go too."""
    if width is None:
        return replace(cloud, widths=cloud.widths[:axis]) if axis else cloud
    return replace(cloud, widths=(*cloud.widths[:axis], width, *cloud.widths[axis + 1 :]))


def checked(plan: Plan) -> Plan:
    """The plan, if its measured clouds have a place; else PlanError."""
    measured_clouds(plan)
    return plan
