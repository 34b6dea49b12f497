#!/usr/bin/env bash
# Packs the project, installs the package in an empty folder, and cleans a log with a packed sample pipeline.
set -euo pipefail
root=$(cd "$(dirname "$0")/.." && pwd)
place=$(mktemp -d)
trap 'rm -rf "$place"' EXIT
cd "$place"
tarball=$(npm pack --silent --pack-destination "$place" "$root" | tail -1)
npm init -y >/dev/null
npm install --no-audit --no-fund --silent "./$tarball"
npx forebay --version
for pipeline in node_modules/forebay/pipelines/*.yaml; do
  npx forebay rehearse "$pipeline" >/dev/null
  npx forebay clean "$pipeline" --folder "cleaned/$(basename "$pipeline" .yaml)" --quiet
  test -s "cleaned/$(basename "$pipeline" .yaml)/runs.jsonl"
done
echo "packed: installed and ran elsewhere"
