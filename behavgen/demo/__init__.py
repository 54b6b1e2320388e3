"""The built-in invented scenario: its project file, its tables and what wrote them."""

from behavgen.demo.layout import copy_demo

__all__ = ["copy_demo"]
