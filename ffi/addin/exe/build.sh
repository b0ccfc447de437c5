#!/usr/bin/env bash
# Builds the command line for Windows, target/addin/hence.exe, and a file to drop workbooks on.
set -euo pipefail
cd "$(dirname "$0")/../../.."

target=${CARGO_TARGET_DIR:-target}
# xlsxwriter's build script reads C headers through libclang, which must be told where those for Windows are; its own
# come first.
includes=
for folder in /usr/lib/llvm*/lib/clang/*/include /usr/x86_64-w64-mingw32/include; do
  [ -d "$folder" ] && includes="$includes -isystem $folder"
done
export BINDGEN_EXTRA_CLANG_ARGS=${BINDGEN_EXTRA_CLANG_ARGS:-$includes}
bash ffi/addin/cross.sh build --release --locked --package hence-cli
mkdir -p "$target/addin"
cp "$target/cross/x86_64-pc-windows-gnu/release/hence.exe" "$target/addin/hence.exe"
sed 's/$/\r/' ffi/addin/exe/drop-workbooks-here.cmd >"$target/addin/drop-workbooks-here.cmd"
echo "$target/addin/hence.exe"
