#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Builds a Debian package from an installed tree. Usage: make-deb.sh VERSION OUTPUT-FOLDER
# Called by `make deb`, from the top of the source.
set -eu
version=$1 out=$2
here=generator/packaging
root=$out/root
arch=$(dpkg --print-architecture)
: "${SOURCE_DATE_EPOCH:=$(git log -1 --format=%ct 2>/dev/null || echo 0)}"
export SOURCE_DATE_EPOCH
rm -rf "$root"
mkdir -p "$root/DEBIAN" "$root/usr/share/doc/polewright"
make -s install PREFIX=/usr LIBDIR="lib/$(dpkg-architecture -qDEB_HOST_MULTIARCH)" DESTDIR="$root"
strip --strip-unneeded "$root/usr/bin/polewright"
strip --strip-debug "$root"/usr/lib/*/*.a
gzip -9n "$root"/usr/share/man/man*/*
install -m 644 $here/copyright "$root/usr/share/doc/polewright/copyright"
printf 'polewright (%s) unstable; urgency=medium\n\n  * Release %s.\n\n -- polewright maintainers <maintainers@polewright.example>  %s\n' \
  "$version" "$version" "$(date -u -R -d @"$SOURCE_DATE_EPOCH")" | gzip -9n > "$root/usr/share/doc/polewright/changelog.gz"
find "$root" -type d -exec chmod 755 {} +
find "$root/usr/share" -type f -exec chmod 644 {} +
find "$root/usr/share/polewright" -type f -name '*.sh' -exec chmod 755 {} +
mkdir -p "$out/debian"
printf 'Source: polewright\n\nPackage: polewright\nArchitecture: any\nDescription: x\n' > "$out/debian/control"
depends=$(cd "$out" && dpkg-shlibdeps -O --ignore-missing-info -eroot/usr/bin/polewright | sed 's/^shlibs:Depends=//')
size=$(du -k -s "$root/usr" | cut -f 1)
sed -e "s/@VERSION@/$version/" -e "s/@ARCH@/$arch/" -e "s/@DEPENDS@/$depends/" -e "s/@SIZE@/$size/" \
  $here/control.in > "$root/DEBIAN/control"
(cd "$root" && find usr -type f | LC_ALL=C sort | xargs md5sum > DEBIAN/md5sums)
find "$root" -exec touch -h -d @"$SOURCE_DATE_EPOCH" {} +
dpkg-deb --root-owner-group -b "$root" "$out/polewright_${version}_$arch.deb"
