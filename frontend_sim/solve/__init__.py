"""The inverse answer: which values of a key pass the checks of a scenario."""

from frontend_sim.solve.pass_map import Mapper, PassMap, pass_map
from frontend_sim.solve.proof import check_proof_target, keep_proof
from frontend_sim.solve.search import Boundary, Search
from frontend_sim.solve.solution import Solution
from frontend_sim.solve.solver import Solver, solve_for
from frontend_sim.solve.trial import Trial
from frontend_sim.solve.varied import Varied, varied

__all__ = [
    "Boundary",
    "Mapper",
    "PassMap",
    "Search",
    "Solution",
    "Solver",
    "Trial",
    "Varied",
    "check_proof_target",
    "keep_proof",
    "pass_map",
    "solve_for",
    "varied",
]
