"""Settings that all tests share; this file's folder is on the path, so that ``import helpers`` finds its neighbour."""

from hypothesis import Phase, settings

# Repeatable, and free of clocks: a test fails for what it shows, never for the machine it runs on.
settings.register_profile("house", deadline=None, derandomize=True, database=None, max_examples=50)
# For constants/perturb.py, which only asks whether something fails: no search for the smallest example.
settings.register_profile(
    "quick", settings.get_profile("house"), max_examples=10, phases=[Phase.explicit, Phase.generate]
)
settings.load_profile("house")
