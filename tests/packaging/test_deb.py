#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""The Debian package: lintian finds no error, and in a clean root that debootstrap made from this
machine's own archive it installs with its dependencies and builds a stage. Only in the full run."""
import glob
import os
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), ".."))
import tap


def run(*command, **kwargs):
    return subprocess.run(command, capture_output=True, text=True, **kwargs)


def site():
    """The archive this machine installs from."""
    listed = run("apt-get", "indextargets", "--format", "$(SITE) $(RELEASE)").stdout.splitlines()
    return next((line.split()[0] for line in listed if line.endswith(" bookworm")), None)


def test_package():
    ran = run("make", "-s", "deb", cwd=tap.ROOT)
    packages = glob.glob(tap.ROOT + "/build/deb/*.deb")
    if not tap.check(ran.returncode == 0 and len(packages) == 1, "make deb", ran.stderr[-500:]):
        return None
    with open(packages[0], "rb") as f:
        first = f.read()
    run("make", "-s", "deb", cwd=tap.ROOT)
    with open(packages[0], "rb") as f:
        tap.check(f.read() == first, "twice the same bytes")
    ran = run("lintian", "--fail-on", "error", packages[0])
    tap.check(ran.returncode == 0, "lintian finds no error", ran.stdout)
    return packages[0]


def test_clean_root(package):
    root = tempfile.mkdtemp()
    ran = run("debootstrap", "--variant=minbase", "bookworm", root, site())
    if not tap.check(ran.returncode == 0, "debootstrap makes a clean root", ran.stdout[-800:]):
        return
    shutil.copy(package, root + "/polewright.deb")
    shutil.copy("/etc/resolv.conf", root + "/etc/resolv.conf")
    for name in glob.glob("/etc/apt/apt.conf.d/*"):
        if name.endswith(("proxy", "proxy.conf")):
            shutil.copy(name, root + "/etc/apt/apt.conf.d/")
    inside = ("chroot", root)
    before = run(*inside, "dpkg", "-i", "/polewright.deb")
    tap.check(before.returncode != 0 and "depend" in before.stderr, "its dependencies are declared", before.stderr[-300:])
    ran = run(*inside, "apt-get", "install", "-y", "-q", "--no-install-recommends", "-f")
    tap.check(ran.returncode == 0, "they install", ran.stderr[-500:])
    shutil.copy(tap.ROOT + "/examples/hull-strain/stage.yaml", root + "/stage.yaml")
    ran = run(*inside, "polewright", "build", "/stage.yaml", "-o", "/out")
    tap.check(ran.returncode == 0 and os.path.exists(root + "/out/pw_q15.c"), "and it builds a stage", ran.stdout + ran.stderr)
    with open(root + "/out/report.html") as f:
        tap.check("gnuplot" in f.read(), "the report says that gnuplot is missing where the plots would be")
    run("rm", "-rf", "--one-file-system", root)


if not tap.FULL:
    print("ok 1 - the Debian package # SKIP only in the full run")
elif os.geteuid() != 0 or not shutil.which("debootstrap") or not shutil.which("lintian"):
    tap.check(os.environ.get("CI") != "true", "debootstrap and lintian, as root, are there")
else:
    made = test_package()
    if made:
        test_clean_root(made)
    tap.done()
