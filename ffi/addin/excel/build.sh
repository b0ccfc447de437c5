#!/usr/bin/env bash
# Builds the Excel add-in, target/addin/hence64.xll, with the declarations for macros beside it.
set -euo pipefail
cd "$(dirname "$0")/../../.."

target=${CARGO_TARGET_DIR:-target}
triple=x86_64-pc-windows-gnu
# What a cargo that runs this script has set for itself is not for the compiler used here.
unset RUSTUP_TOOLCHAIN CARGO RUSTC RUSTDOC RUSTFLAGS CARGO_ENCODED_RUSTFLAGS CARGO_BUILD_TARGET LD_LIBRARY_PATH
# Only the exported names are of use in the file.
export CARGO_PROFILE_RELEASE_STRIP=symbols

if ! command -v x86_64-w64-mingw32-gcc >/dev/null; then
  echo "build: the linker is missing; on Debian or Ubuntu: sudo apt-get install gcc-mingw-w64-x86-64" >&2
  exit 2
fi
# A toolchain that holds the standard library for Windows builds as usual. Debian's compiler has none, but comes with its
# source, and builds it along.
options=(--release --locked --package hence-excel --target "$triple" --target-dir "$target/cross")
if [ -d "$(rustc --print sysroot)/lib/rustlib/$triple/lib" ]; then
  cargo build "${options[@]}"
elif [ -d /usr/src/rustc-*/library ] && [ -x /usr/bin/cargo ]; then
  PATH=/usr/bin:$PATH RUSTC_BOOTSTRAP=1 /usr/bin/cargo build -Z build-std=std,panic_unwind "${options[@]}"
else
  echo "build: no Rust standard library for Windows: rustup target add $triple; on Debian: sudo apt-get install" \
    "rustc-web cargo-web rust-web-src" >&2
  exit 2
fi

mkdir -p "$target/addin"
cp "$target/cross/$triple/release/hence_excel.dll" "$target/addin/hence64.xll"
cp ffi/addin/excel/hence.bas "$target/addin/hence.bas"
echo "$target/addin/hence64.xll"
