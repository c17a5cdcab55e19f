import numpy as np

from cornerwise.streams import named_stream


def test_stream_depends_on_name_and_seed_alone() -> None:
    first = named_stream(3, "median R212Q").standard_normal(4)
    assert np.array_equal(first, named_stream(3, "median R212Q").standard_normal(4))
    assert not np.array_equal(first, named_stream(3, "median R212K").standard_normal(4))
    assert not np.array_equal(first, named_stream(4, "median R212Q").standard_normal(4))


def test_any_label_names_a_stream() -> None:
    for label in ("", "Δ6-46", "001", "\ud800"):
        assert np.isfinite(named_stream(0, label).random())
