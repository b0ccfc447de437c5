#!/usr/bin/env bash
# Builds and installs the C interface: `bash ffi/install.sh [--prefix DIR] [--libdir DIR] [--includedir DIR]`.
#
# Installs hence.h, libhence.so (with its versioned name), libhence.a and hence.pc. The prefix is /usr/local unless given;
# DESTDIR is put before every path, as packagers expect.
set -euo pipefail

prefix=/usr/local libdir='' includedir=''
while [ $# -gt 0 ]; do
  case "$1" in
    --prefix | --libdir | --includedir)
      [ -n "${2:-}" ] || { echo "install: $1 needs a folder" >&2; exit 2; }
      declare "${1#--}=$2"
      shift 2
      ;;
    *)
      echo "install: found \"$1\", allowed: --prefix DIR, --libdir DIR, --includedir DIR" >&2
      exit 2
      ;;
  esac
done
libdir=${libdir:-$prefix/lib}
includedir=${includedir:-$prefix/include}
for folder in "$prefix" "$libdir" "$includedir"; do
  case "$folder" in
    /*) ;;
    *) echo "install: $folder has to begin with /" >&2; exit 2 ;;
  esac
done
root=$(cd "$(dirname "$0")/.." && pwd)
cd "$root"

version=$(sed -n 's/^version = "\(.*\)"/\1/p' Cargo.toml | head -1)
abi=$(sed -n 's/^#define HENCE_ABI_VERSION //p' include/hence.h)
# The linker has to write the versioned name into the library, so that programs ask for the interface they were built for.
cargo rustc --release --locked -p hence-ffi --lib --target-dir "${CARGO_TARGET_DIR:-target}/install" -- \
  -C "link-arg=-Wl,-soname,libhence.so.$abi"
built=${CARGO_TARGET_DIR:-target}/install/release

to=${DESTDIR:-}
install -d "$to$includedir" "$to$libdir/pkgconfig"
install -m 644 include/hence.h "$to$includedir/hence.h"
install -m 644 "$built/libhence.a" "$to$libdir/libhence.a"
install -m 755 "$built/libhence.so" "$to$libdir/libhence.so.$abi"
ln -sf "libhence.so.$abi" "$to$libdir/libhence.so"
sed -e "s|@prefix@|$prefix|" -e "s|@libdir@|$libdir|" -e "s|@includedir@|$includedir|" -e "s|@version@|$version|" \
  -e "s|@private@|-lgcc_s -lutil -lrt -lpthread -lm -ldl -lc|" ffi/hence.pc.in > "$to$libdir/pkgconfig/hence.pc"
chmod 644 "$to$libdir/pkgconfig/hence.pc"
echo "installed hence $version in $to$prefix; a library folder that is new to the system needs: ldconfig"
