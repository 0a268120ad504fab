"""A second solution nearby is found where there is one, and not where there is none."""

import math
from dataclasses import replace

import pytest

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.aerodynamics.second_solution import FORCED_AT, NEIGHBOUR, second_solution
from optim.outcomes import Outcome

POINT = OperatingPoint(2e5, alpha=0.05)


class TwoSolutions:
    """A stand-in: from a state called `finds` it has another drag; it notes what it was asked."""

    def __init__(self, finds, drag=0.0102, lost=()):
        self.finds, self.drag, self.lost = finds, drag, lost
        self.asked = []

    def solve(self, point, near=None, *, patient):
        assert not patient
        self.asked.append(point)
        if near is None:
            name = self.name(point)
            return SectionFlow(point, Outcome.CONVERGED, 160), None if name in self.lost else name
        cd = self.drag if near == self.finds else 0.01
        return SectionFlow(point, Outcome.CONVERGED, 160, alpha=0.05, cl=0.5, cd=cd), None

    @staticmethod
    def name(point):
        if point.trip_upper < 1.0:
            return "forced"
        return "below" if point.alpha < 0.05 else "above"


@pytest.fixture
def flow():
    return SectionFlow(POINT, Outcome.CONVERGED, 160, alpha=0.05, cl=0.5, cd=0.01)


@pytest.mark.parametrize("finds", ["below", "above", "forced"])
def test_each_start_is_tried(finds, flow):
    other = second_solution(TwoSolutions(finds), flow)
    assert other is not None
    assert other.cd == 0.0102


def test_no_start_finds_another(flow):
    evaluator = TwoSolutions("nothing")
    assert second_solution(evaluator, flow) is None
    neighbours = [point for point in evaluator.asked if point != POINT]
    assert [point.alpha - 0.05 for point in neighbours] == pytest.approx([-NEIGHBOUR, NEIGHBOUR, 0])
    assert (neighbours[-1].trip_upper, neighbours[-1].trip_lower) == (FORCED_AT, FORCED_AT)


def test_a_difference_below_half_a_percent_is_none(flow):
    assert second_solution(TwoSolutions("below", drag=0.01004), flow) is None


def test_a_start_without_a_flow_is_passed_over(flow):
    assert second_solution(TwoSolutions("below", lost=("below",)), flow) is None


def test_a_given_lift_is_met_again(flow):
    """The neighbours have angles, the condition itself keeps its lift."""
    evaluator = TwoSolutions("nothing")
    given = replace(flow, point=replace(POINT, alpha=None, cl=0.5))
    second_solution(evaluator, given)
    assert [point.cl for point in evaluator.asked] == [None, 0.5] * 3


@pytest.mark.parametrize("degrees", [0.0, 6.0])
def test_an_attached_flow_at_high_reynolds_number_has_one(degrees, naca):
    flow = naca("2412").flow(OperatingPoint(6e6, alpha=math.radians(degrees)))
    assert flow.converged
    assert second_solution(naca("2412"), flow) is None
