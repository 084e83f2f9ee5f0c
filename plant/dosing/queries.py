"""What other rooms ask of this one."""

from plant.dosing.comparison import comparison
from plant.dosing.period import period
from plant.dosing.stock_book import reconciliation, stock, stocks
from plant.dosing.trail import NoSuchFigure, trail

__all__ = ["NoSuchFigure", "comparison", "period", "reconciliation", "stock", "stocks", "trail"]
