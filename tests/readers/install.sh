#!/usr/bin/env bash
# Installs the independent readers: gemmi, PyCifRW, spglib, numpy and scipy into target/readers, cod-tools where apt-get may.
set -u
cd "$(dirname "$0")/../.."
if [ ! -x target/readers/bin/python ]; then
    mkdir -p target && python3 -m venv target/readers || { echo "no independent readers: python3 with venv is missing"; exit 1; }
fi
target/readers/bin/python -c 'import gemmi, CifFile, spglib, numpy, scipy' 2>/dev/null ||
    target/readers/bin/python -m pip install --quiet --disable-pip-version-check gemmi==0.7.5 PyCifRW==5.0.1 spglib numpy scipy ||
    { echo "no independent readers: the packages cannot be installed"; exit 1; }
if ! command -v ddlm_validate >/dev/null && command -v apt-get >/dev/null && [ "$(id -u)" = 0 ]; then
    apt-get update -qq && DEBIAN_FRONTEND=noninteractive apt-get install -y -qq cod-tools >/dev/null ||
        echo "cod-tools cannot be installed; its checks are left out"
fi
exit 0
