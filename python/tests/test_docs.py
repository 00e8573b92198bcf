"""The examples in the documentation run."""

import doctest
import inspect

import pytest

import albedra as al

DOCUMENTED = [name for name in al.__all__ if name != "__version__"]
WITH_EXAMPLES = [name for name in DOCUMENTED if ">>>" in inspect.getdoc(getattr(al, name))]


@pytest.mark.parametrize("name", DOCUMENTED)
def test_every_name_is_documented(name):
    text = inspect.getdoc(getattr(al, name))
    first = text.splitlines()[0]
    assert first.endswith(".") or text.splitlines()[1].endswith("."), first


@pytest.mark.parametrize("name", ["albedra", *WITH_EXAMPLES])
def test_examples_run(name):
    text = inspect.getdoc(al if name == "albedra" else getattr(al, name))
    test = doctest.DocTestParser().get_doctest(text, {}, name, None, 0)
    assert test.examples
    runner = doctest.DocTestRunner(optionflags=doctest.NORMALIZE_WHITESPACE)
    said = []
    runner.run(test, out=said.append)
    assert runner.failures == 0, "".join(said)


def test_the_main_names_have_examples():
    assert set(WITH_EXAMPLES) >= {
        "Coating", "CoverageInterval", "Decay", "Enclosure", "Estimate", "Experiment", "Ledger",
        "Medium", "Outcome", "Region", "Source", "TimeGrid", "load",
    }  # fmt: skip


def test_methods_are_documented():
    for name in DOCUMENTED:
        for method, value in vars(getattr(al, name)).items() if inspect.isclass(getattr(al, name)) else ():
            # An exception's attribute is None in the class; what a tuple has comes without a text of ours.
            if not method.startswith("_") and value is not None and method not in ("count", "index"):
                assert inspect.getdoc(value), f"{name}.{method}"
