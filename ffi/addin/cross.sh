#!/usr/bin/env bash
# Runs cargo for 64-bit Windows, into target/cross: `bash ffi/addin/cross.sh build --release --package hence-excel`.
set -euo pipefail

triple=x86_64-pc-windows-gnu
target=${CARGO_TARGET_DIR:-target}
# What a cargo that runs this script has set for itself is not for the compiler used here.
unset RUSTUP_TOOLCHAIN CARGO RUSTC RUSTDOC RUSTFLAGS CARGO_ENCODED_RUSTFLAGS CARGO_BUILD_TARGET LD_LIBRARY_PATH
# Only the exported names are of use in the file.
export CARGO_PROFILE_RELEASE_STRIP=symbols

if ! command -v x86_64-w64-mingw32-gcc >/dev/null; then
  echo "cross: the linker is missing; on Debian or Ubuntu: sudo apt-get install gcc-mingw-w64-x86-64" >&2
  exit 2
fi
# A toolchain that holds the standard library for Windows builds as usual. Debian's compiler holds none, but comes with
# its source, and builds it along.
if [ -d "$(rustc --print sysroot)/lib/rustlib/$triple/lib" ]; then
  cargo "$@" --target "$triple" --target-dir "$target/cross"
elif [ -x /usr/bin/cargo ] && [ -d "$(/usr/bin/rustc --print sysroot)/lib/rustlib/src/rust/library" ]; then
  export PATH=/usr/bin:$PATH RUSTC_BOOTSTRAP=1
  cargo "$@" -Z build-std=std,panic_unwind --target "$triple" --target-dir "$target/cross"
else
  echo "cross: no Rust standard library for Windows: rustup target add $triple; or, on Debian 12, sudo apt-get" \
    "install rustc-web cargo-web rust-web-src" >&2
  exit 2
fi
