"""From an estimate to simulated total cost, and the checks of the simulation."""

from contingency.simulation.engine import simulate
from contingency.simulation.result import Simulation

__all__ = ["Simulation", "simulate"]
