#!/usr/bin/env bash
# Builds an add-in into target/addin: `bash ffi/addin/build.sh calc` or `bash ffi/addin/build.sh excel`; with `exe` the
# command line for Windows.
set -euo pipefail
cd "$(dirname "$0")/../.."

case "${1:-}" in
  calc | excel | exe) exec bash "ffi/addin/$1/build.sh" "${@:2}" ;;
  *)
    echo "build: found \"${1:-}\", allowed: calc, excel, exe" >&2
    exit 2
    ;;
esac
