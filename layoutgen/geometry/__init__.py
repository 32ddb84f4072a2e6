"""From a comb to its artwork, in millimetres; knows no file format."""

from layoutgen.geometry.artwork import Artwork, Circle, Item, Layer, Point, Polygon, Ring
from layoutgen.geometry.draw import draw
from layoutgen.geometry.style import Style

__all__ = ["Artwork", "Circle", "Item", "Layer", "Point", "Polygon", "Ring", "Style", "draw"]
