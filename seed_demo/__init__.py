"""An invented district as the files a team would have; ``README.txt`` beside them says how it was made."""

from __future__ import annotations

from importlib.resources import files as _resources
from pathlib import Path

#: In the order in which they are imported; results by certificate.
MASTER_FILES = (
    "areas.csv", "sites.csv", "surveys.csv", "intervals.csv", "intrusions.csv", "samples.csv",
    "reference_materials.csv",
)  # fmt: skip


def files() -> list[Path]:
    """The files of the scenario as paths: master data in the order of import, then the certificates by name.

    FileNotFoundError, naming the file, where the installation lacks one.
    """
    folder = Path(str(_resources(__name__)))
    found = [folder / name for name in MASTER_FILES]
    found += sorted(folder.glob("results_*.*"))
    missing = [path.name for path in found if not path.is_file()]
    if missing or len(found) == len(MASTER_FILES):
        raise FileNotFoundError(
            f"{folder}: the demo scenario lacks {', '.join(missing) or 'results_*'}; install Plutonbook again, "
            "or run python -m seed_demo.build_scenario in a clone"
        )
    return found
