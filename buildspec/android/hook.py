"""A hook of python-for-android: puts the provider of shared files into the manifest.

python-for-android's template has no place for an element inside <application>; its hooks are the way that it
offers. It calls `before_apk_assemble` in the folder of the distribution, after the manifest was rendered and
before gradle reads it.
"""

from __future__ import annotations

from pathlib import Path

# Written twice by python-for-android; gradle reads the first.
MANIFESTS = ("src/main/AndroidManifest.xml", "AndroidManifest.xml")
END = "</application>"
PROVIDER = """
        <provider android:name="androidx.core.content.FileProvider"
                  android:authorities="${applicationId}.files"
                  android:exported="false"
                  android:grantUriPermissions="true">
            <meta-data android:name="android.support.FILE_PROVIDER_PATHS"
                       android:resource="@xml/shared_files" />
        </provider>
    """


def with_provider(manifest: str) -> str:
    """Give the manifest with the provider in it, once."""
    if PROVIDER in manifest:
        return manifest
    if manifest.count(END) != 1:
        raise ValueError(f"the manifest has {manifest.count(END)} times {END}; expected once")
    return manifest.replace(END, PROVIDER + END)


def before_apk_assemble(_toolchain: object) -> None:
    """Add the provider to each manifest in the folder that python-for-android works in."""
    for name in MANIFESTS:
        path = Path(name)
        path.write_text(with_provider(path.read_text(encoding="utf-8")), encoding="utf-8")
