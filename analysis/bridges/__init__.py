"""Genes between modules: roles, what a removal would part, links between modules, and how far things spread."""

from __future__ import annotations

from analysis.bridges.roles import HUB_Z, ROLES, RoleTable, assign_roles, classify

__all__ = ["HUB_Z", "ROLES", "RoleTable", "assign_roles", "classify"]
