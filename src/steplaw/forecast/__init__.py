"""Forecasts: what a law and its clock check say of sizes that were not run."""

from __future__ import annotations

from steplaw.forecast.job import forecast

__all__ = ["forecast"]
