#!/usr/bin/env bash
# Builds the extension for LibreOffice Calc, target/addin/hence.oxt, with the library for this platform in it. Libraries
# for others, built elsewhere, are added with: build.sh windows_x86_64=path/to/hence.dll ...
set -euo pipefail
cd "$(dirname "$0")/../../.."
target=${CARGO_TARGET_DIR:-target}

# Platforms as extensions name them.
case "$(uname -s)" in
  Linux) system=linux library=libhence.so ;;
  Darwin) system=macosx library=libhence.dylib ;;
  MINGW* | MSYS* | CYGWIN*) system=windows library=hence.dll ;;
  *)
    echo "build: no extension can be made on $(uname -s)" >&2
    exit 2
    ;;
esac
case "$(uname -m)" in
  x86_64) machine=x86_64 ;;
  aarch64 | arm64) machine=aarch64 ;;
  *) machine=$(uname -m) ;;
esac

cargo build --quiet --release --locked -p hence-ffi --lib
mkdir -p "$target/addin"
cargo run --quiet --locked -p hence-ffi --example calc-addin -- \
  "$target/addin/hence.oxt" "${system}_$machine=$target/release/$library" "$@"
echo "$target/addin/hence.oxt"
