"""The checks of the house find what they look for: each meets a planted breach and a clean twin."""

from __future__ import annotations

import pytest

from tests import house_checks as house


def test_long_functions_are_found_without_counting_docs_blanks_and_comments() -> None:
    body = "".join(f"    x = {number}\n" for number in range(59))
    padding = '    """One.\n\n    Two.\n    """\n\n    # three\n'
    assert house.long_functions(f"def f():\n{padding}{body}") == []
    assert house.long_functions(f"def f():\n{padding}{body}    y = 1\n") == ["f has 61 code lines"]


@pytest.mark.parametrize(
    ("source", "found"),
    [
        ("def f():\n    raise ValueError\n", True),
        ("def _f():\n    raise ValueError\n", False),
        ("def f():\n    _g()\ndef _g():\n    raise ValueError\n", True),
        ('def f():\n    """F.\n\n    Raises\n    ------\n    E\n    """\n    raise E\n', False),
        ("def f():\n    g()\ndef g():\n    return 1\n", False),
        ("class A:\n    def f(self):\n        raise ValueError\n", True),
        ("class A:\n    def __init__(self):\n        raise ValueError\n", False),
        ("def f():\n    def g():\n        raise ValueError\n    return g\n", False),
    ],
)
def test_undocumented_raises_are_found(source: str, *, found: bool) -> None:
    assert bool(house.undocumented_raises(source)) is found


@pytest.mark.parametrize(
    ("source", "found"),
    [
        ("x = 1  # noqa\n", True),
        ("x = 1  # noqa: S311\n", True),
        ("x = 1  # noqa: S311 - no secrets are kept\n", False),
        ("# no secrets are kept\nx = 1  # noqa: S311\n", False),
        ("x = 1  # type: ignore\n", True),
        ("x = 1  # type: ignore[arg-type]\n", True),
        ("x = 1  # type: ignore[arg-type]  # the stub is wrong\n", False),
        ("x = '# noqa'\n", False),
    ],
)
def test_bare_exceptions_to_rules_are_found(source: str, *, found: bool) -> None:
    assert bool(house.bare_exceptions_to_rules(source)) is found


@pytest.mark.parametrize(
    ("source", "found"),
    [
        ("@njit(fastmath=True)\ndef f(): ...\n", True),
        ("@njit(fastmath={'nsz'})\ndef f(): ...\n", True),
        ("@njit(parallel=True)\ndef f(): ...\n", True),
        ("@njit(cache=True)\ndef f(): ...\n", False),
    ],
)
def test_fast_arithmetic_is_found(source: str, *, found: bool) -> None:
    assert bool(house.fast_math(source)) is found


def test_unexported_names_are_found() -> None:
    assert house.unexported("def f(): ...\n")
    assert house.unexported("__all__ = ['g']\ndef f(): ...\ndef g(): ...\n")
    assert house.unexported("__all__ = ['f']\ndef f(): ...\ndef _g(): ...\n") == []


def test_imports_are_found_wherever_they_stand() -> None:
    source = "import a.b\nfrom c.d import e\ndef f():\n    import g\n"
    assert house.imported_modules(source) == {"a", "c", "g"}


@pytest.mark.parametrize(
    "text",
    [
        "see /" + "tmp/x",
        "in '/" + "work/main'",
        "from https://" + "pypi" + ".org/simple",
        "as issue " + "#12 asks",
    ],
)
def test_words_of_the_workplace_are_found(text: str) -> None:
    assert house.forbidden_words(text)


def test_ordinary_words_pass() -> None:
    assert house.forbidden_words("The office works on it; see ../shared or data/x. An issue.") == []
