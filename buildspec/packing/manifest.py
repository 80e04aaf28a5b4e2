"""What the manifest, rendered by python-for-android itself, would let the app do."""

from __future__ import annotations

import json
import subprocess
import sys
import tarfile
import xml.etree.ElementTree as ET
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from packing.spec import Finding

if TYPE_CHECKING:
    from packing.spec import Spec
    from packing.staging import Staged

CHECK = "manifest"
ANDROID = "{http://schemas.android.com/apk/res/android}"
ALLOWED = {
    "android.permission.ACCESS_FINE_LOCATION": "the place of an outcrop",
    "android.permission.ACCESS_COARSE_LOCATION": "Android asks for it together with the fine one",
    "android.permission.VIBRATE": "a reading kept is felt",
}
"""The permissions the app may ask for, and what for."""
MAY_BE_MISSING = (
    "android.hardware.location",
    "android.hardware.location.gps",
    "android.hardware.location.network",
    "android.hardware.sensor.accelerometer",
    "android.hardware.sensor.compass",
)
"""Parts of a device without which the app works, so that they must not keep it from being installed."""
LEAST_TARGET = 36  # asked of new apps by the large store from August 2026 on (from memory)


@dataclass(frozen=True, slots=True)
class Rendered:
    """What python-for-android made of the spec."""

    manifest: str
    version: str
    resources: frozenset[str]
    """Files below res/, such as xml/shared_files.xml."""
    archived: frozenset[str]
    """Files of the private archive, which the device unpacks."""
    archive_bytes: int


def render(spec: Spec, staged: Staged, work: Path) -> Rendered | Finding:
    """Let buildozer and python-for-android render; a finding where they refuse."""
    program = Path(__file__).with_name("p4a_render.py")
    done = subprocess.run(
        [sys.executable, str(program), str(spec.path), str(staged.folder), str(work)],
        capture_output=True,
        text=True,
        check=False,
    )
    if done.returncode != 0:
        last = [line for line in done.stderr.splitlines() if line.strip()][-3:]
        return Finding(CHECK, "buildozer or python-for-android refuses the spec: " + " / ".join(last))
    told = json.loads(done.stdout.splitlines()[-1])
    main = Path(told["dist"]) / "src" / "main"
    archive = main / "assets" / "private.tar"
    with tarfile.open(archive) as tar:
        archived = frozenset(member.name for member in tar if member.isfile())
    return Rendered(
        manifest=(main / "AndroidManifest.xml").read_text(encoding="utf-8"),
        version=told["version"],
        resources=frozenset(
            path.relative_to(main / "res").as_posix() for path in (main / "res").rglob("*") if path.is_file()
        ),
        archived=archived,
        archive_bytes=archive.stat().st_size,
    )


def check_manifest(rendered: Rendered, spec: Spec, project: dict[str, object]) -> list[Finding]:
    """Read the manifest as Android would."""
    # Rendered a moment ago by a program on this machine: there is no hostile XML to guard against.
    root = ET.fromstring(rendered.manifest)  # noqa: S314
    findings: list[str] = []
    asked = {
        element.get(f"{ANDROID}name") for element in root.iter() if element.tag.startswith("uses-permission")
    }
    findings += [f"asks for the permission {name}" for name in sorted(asked - set(ALLOWED), key=str)]
    findings += [f"does not ask for {name}: {ALLOWED[name]}" for name in sorted(set(ALLOWED) - asked)]
    optional = {
        element.get(f"{ANDROID}name")
        for element in root.iter("uses-feature")
        if element.get(f"{ANDROID}required") == "false"
    }
    needed = {element.get(f"{ANDROID}name") for element in root.iter("uses-feature")} - optional - {None}
    findings += [f"cannot be installed on a device without {name}" for name in sorted(needed)]
    findings += [
        f"does not say that {name} may be missing" for name in MAY_BE_MISSING if name not in optional
    ]
    if root.get(f"{ANDROID}versionName") != project["version"]:
        findings.append(
            f"is version {root.get(f'{ANDROID}versionName')}; pyproject.toml says {project['version']}"
        )
    sdk = root.find("uses-sdk")
    target = int(sdk.get(f"{ANDROID}targetSdkVersion", "0")) if sdk is not None else 0
    if target < LEAST_TARGET:
        findings.append(f"aims at Android API {target}; {LEAST_TARGET} is current")
    findings += _application_faults(root, rendered)
    if "arm64-v8a" not in spec.items("android.archs"):
        findings.append("is not built for arm64-v8a")
    return [Finding(CHECK, text) for text in findings]


def _application_faults(root: ET.Element, rendered: Rendered) -> list[str]:
    application, activity = root.find("application"), root.find("application/activity")
    if application is None or activity is None:
        return ["has no activity"]
    faults = []
    if activity.get(f"{ANDROID}screenOrientation") != "unspecified":
        faults.append(f"holds the screen at {activity.get(f'{ANDROID}screenOrientation')}")
    # Without these Android would start the app anew at each turn of the device.
    handled = set((activity.get(f"{ANDROID}configChanges") or "").split("|"))
    faults += [
        f"is started anew when {change} changes" for change in sorted({"orientation", "screenSize"} - handled)
    ]
    if application.get(f"{ANDROID}allowBackup") != "true":
        faults.append("keeps the notebook out of the device's backup")
    if application.get(f"{ANDROID}enableOnBackInvokedCallback") != "false":
        faults.append("does not get the back key from Android 16 on")
    named = [application.get(f"{ANDROID}{name}") for name in ("fullBackupContent", "dataExtractionRules")]
    providers = [each for each in application.iter("provider") if each.get(f"{ANDROID}exported") == "false"]
    if not any(str(each.get(f"{ANDROID}name")).endswith(".FileProvider") for each in providers):
        faults.append("has no provider: a file cannot be shared")
    named += [data.get(f"{ANDROID}resource") for each in providers for data in each.iter("meta-data")]
    for name in named:
        if name is None:
            faults.append("names no rules for the backup")
        elif f"{name.removeprefix('@')}.xml" not in rendered.resources:
            faults.append(f"names {name}, which is not among the resources")
    return faults


def check_archive(rendered: Rendered, staged: Staged) -> list[Finding]:
    """Whether every staged file comes through buildozer's own choice of files into the archive."""
    lost = set(staged.sizes) - rendered.archived
    return [Finding(CHECK, f"{name} is staged, but buildozer leaves it out") for name in sorted(lost)]
