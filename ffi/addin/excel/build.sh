#!/usr/bin/env bash
# Builds the Excel add-in, target/addin/hence64.xll, with the declarations for macros beside it.
set -euo pipefail
cd "$(dirname "$0")/../../.."

target=${CARGO_TARGET_DIR:-target}
bash ffi/addin/cross.sh build --release --locked --package hence-excel
mkdir -p "$target/addin"
cp "$target/cross/x86_64-pc-windows-gnu/release/hence_excel.dll" "$target/addin/hence64.xll"
cp ffi/addin/excel/hence.bas "$target/addin/hence.bas"
echo "$target/addin/hence64.xll"
