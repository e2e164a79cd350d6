"""The physics of corner reflectors: designs in, far fields and figures of merit out."""

from models.build import Build
from models.figures import Figures, Terms
from models.geometry import Reflectors
from models.ladder import MODELS, evaluate, radiate, sphere

__all__ = ["MODELS", "Build", "Figures", "Reflectors", "Terms", "evaluate", "radiate", "sphere"]
