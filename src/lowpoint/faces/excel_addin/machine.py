"""What installing asks of the machine: its system, folders, registry and packages; tests give one of their own."""

from __future__ import annotations

import os
import sys
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from lowpoint.faces.excel_addin.wants import Versions, installed

__all__ = ["Machine", "Registry", "read_registry"]

Value = str | int | None


class Registry:
    """The registry of Windows, to be read only."""

    def value(self, hive: str, key: str, name: str = "") -> Value:
        """A value, None where there is none; ``hive`` is `user` or `machine`."""
        return read_registry(hive, key, name)


def read_registry(hive: str, key: str, name: str) -> Value:
    """One value of the registry of this system; None on a system that has none."""
    if sys.platform != "win32":
        return None
    import winreg

    root = winreg.HKEY_CURRENT_USER if hive == "user" else winreg.HKEY_LOCAL_MACHINE
    try:
        with winreg.OpenKey(root, key) as opened:
            found = winreg.QueryValueEx(opened, name)[0]
    except OSError:
        return None
    return found if isinstance(found, str | int) else None


@dataclass(frozen=True)
class Machine:
    """The machine at hand."""

    system: str = sys.platform
    environment: Mapping[str, str] = field(default_factory=lambda: dict(os.environ))
    python: Path = field(default_factory=lambda: Path(sys.executable))
    registry: Registry = field(default_factory=Registry)
    versions: Versions = installed

    @property
    def windows(self) -> bool:
        return self.system == "win32"

    def excel(self) -> str | None:
        """The program, where Windows says that it is; None where it does not know Excel."""
        key = r"SOFTWARE\Microsoft\Windows\CurrentVersion\App Paths\excel.exe"
        for hive in ("machine", "user"):
            found = self.registry.value(hive, key)
            if isinstance(found, str) and found:
                return found
        return None

    def excel_bits(self) -> int | None:
        """32 or 64, None where the registry does not tell."""
        key = r"SOFTWARE\Microsoft\Office\ClickToRun\Configuration"
        told = {"x64": 64, "x86": 32}.get(str(self.registry.value("machine", key, "Platform")))
        return told

    def macros_forbidden(self) -> bool:
        """Has somebody switched the trusted folders off, where add-ins start without a question?"""
        end = r"Microsoft\Office\16.0\Excel\Security\Trusted Locations"
        keys = (rf"SOFTWARE\Policies\{end}", rf"SOFTWARE\{end}")
        return any(self.registry.value("user", key, "AllLocationsDisabled") == 1 for key in keys)

    def start_folder(self) -> Path | None:
        """The folder whose books Excel opens when it starts, trusted as it comes from the maker."""
        roaming = self.environment.get("APPDATA")
        return Path(roaming) / "Microsoft" / "Excel" / "XLSTART" if roaming else None
