"""The tables of the bottles app, one concept a file."""

from bottles.models.bottle import Bottle, Custody, Ownership
from bottles.models.day_plan import DayPlan, DayPlanResult
from bottles.models.fit import Fit
from bottles.models.movement import Account, Delivery, Line, Movement
from bottles.models.refill import Decision, Draw, Forecast, Refill, RefillCheck
from bottles.models.scale import Scale, ScaleCheck
from bottles.models.stamp import Condition, ConditionEnd, Stamp, StampStrike
from bottles.models.standing import Standing
from bottles.models.station import Station, Supply
from bottles.models.tare import Tare, TarePart
from bottles.models.weighing import Weighing, WeighingStrike

__all__ = [
    "Account", "Bottle", "Condition", "ConditionEnd", "Custody", "DayPlan", "DayPlanResult", "Decision",
    "Delivery", "Draw", "Fit", "Forecast", "Line", "Movement", "Ownership", "Refill", "RefillCheck", "Scale", "ScaleCheck",
    "Stamp", "StampStrike", "Standing", "Station", "Supply", "Tare", "TarePart", "Weighing",
    "WeighingStrike",
]
