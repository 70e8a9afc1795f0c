"""The yardstick: how well the model reproduces published equilibria."""

from __future__ import annotations
