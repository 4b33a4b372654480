"""The nouns: frozen records whose copies know nothing of the original."""

from tests.simulation.estimates import a_bit_of_everything, package


def test_a_changed_copy_forgets_what_was_derived():
    """Base and open events are worked out anew after a change."""
    model = a_bit_of_everything()
    before = (model.base, model.open_events)
    changed = model.model_copy(update={"packages": (package("A"),), "events": ()})

    assert before[0] == 800.0
    assert changed.base == 100.0
    assert changed.open_events == ()
    assert (model.base, model.open_events) == before
