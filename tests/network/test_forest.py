"""Trees of legs and zones: what lies beneath what, told by places alone."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from budget.network.forest import Forest

PARENTS = st.lists(st.integers(0, 10_000), max_size=40).map(
    lambda drawn: [draw % (number + 1) - 1 for number, draw in enumerate(drawn)]
)


def above(parents: list[int], member: int) -> list[int]:
    """Return a member and all above it."""
    found = []
    while member >= 0:
        found.append(member)
        member = parents[member]
    return found


@given(PARENTS)
def test_what_lies_beneath_is_what_has_it_above(parents: list[int]) -> None:
    tree, members = Forest.of(parents), np.arange(-1, len(parents))
    for root in range(len(parents)):
        assert tree.within(members, root).tolist() == [root in above(parents, member) for member in members.tolist()]


@given(PARENTS)
def test_the_child_towards_a_member_is_the_one_that_it_has_above(parents: list[int]) -> None:
    tree, members = Forest.of(parents), np.arange(len(parents))
    for root in range(len(parents)):
        expected = [
            next((one for one in above(parents, member) if parents[one] == root), -1) for member in members.tolist()
        ]
        assert tree.child_towards(root, members).tolist() == expected


@given(PARENTS)
def test_places_are_all_taken_once(parents: list[int]) -> None:
    assert sorted(Forest.of(parents).enter.tolist()) == list(range(len(parents)))
