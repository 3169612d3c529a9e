"""What the user asked for: the scenario file, read, checked, written back and documented."""

from .bodies import LensBody, PolygonBody, RandomGround, RectangleBody
from .documents import json_schema, keys_table
from .ground_schema import Ground, Layer, Terrain
from .material import FillMissing
from .schema import Edges, Mesh, Output, Scenario, Section, Snapshots
from .source_schema import ExplosionSource, ForceSource, MomentSource, Pulse, Receivers
from .template import template_text

__all__ = [
    "Edges",
    "ExplosionSource",
    "FillMissing",
    "ForceSource",
    "Ground",
    "Layer",
    "LensBody",
    "Mesh",
    "MomentSource",
    "Output",
    "PolygonBody",
    "Pulse",
    "RandomGround",
    "Receivers",
    "RectangleBody",
    "Scenario",
    "Section",
    "Snapshots",
    "Terrain",
    "json_schema",
    "keys_table",
    "template_text",
]
