#!/usr/bin/env bash
# Every check of the project, in the order in which they fail fastest. Installs what it needs and says so; stops at the
# first failure. Run from anywhere: bash tests/all.sh
set -euo pipefail
cd "$(dirname "$0")/.."
export RUSTFLAGS="${RUSTFLAGS:-} -D warnings"
export RUSTDOCFLAGS="-D warnings"

# Targets without an operating system on which the library must build.
BARE_TARGETS=(thumbv6m-none-eabi thumbv7em-none-eabihf)
# Targets of the emulated machines (boards/emulated).
MACHINE_TARGETS=(thumbv6m-none-eabi thumbv7m-none-eabi thumbv7em-none-eabihf thumbv8m.main-none-eabihf
    riscv32imac-unknown-none-elf)
# Crates of real boards, which are built and not run.
REAL_BOARDS=(rp-pico blackpill)
# Feature sets of the library: none, each, all.
FEATURE_SETS=("" defmt hal link serde store "defmt hal link serde store")

stage() { printf '\n== %s\n' "$*"; }
die() { printf 'tests/all.sh: %s\n' "$*" >&2; exit 1; }

need_target() {
    rustup target list --installed | grep -qx "$1" && return
    echo "installing the Rust target $1"
    rustup target add "$1" || die "cannot install the Rust target $1"
}

# need_command COMMAND PACKAGE: a Debian package that brings a command
need_command() {
    command -v "$1" > /dev/null && return
    echo "installing the Debian package $2 for $1"
    local sudo=()
    [ "$(id -u)" = 0 ] || sudo=(sudo)
    "${sudo[@]}" apt-get update -qq || die "cannot read the package lists"
    "${sudo[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "$2" > /dev/null \
        || die "cannot install $2"
}

stage "what is needed"
command -v cargo > /dev/null || die "cargo is missing: install Rust with rustup"
command -v rustup > /dev/null || die "rustup is missing: it brings the bare-metal targets"
for target in "${BARE_TARGETS[@]}" "${MACHINE_TARGETS[@]}"; do need_target "$target"; done
need_command qemu-system-arm qemu-system-arm
need_command qemu-system-riscv32 qemu-system-misc
need_command python3 python3-venv

stage "format"
cargo fmt --all --check

stage "lints"
cargo clippy --quiet --workspace --all-targets --locked
for features in "${FEATURE_SETS[@]}"; do
    echo "library with features: ${features:-none}"
    cargo clippy --quiet --locked --package evenbore --lib --no-default-features --features "$features"
done

stage "every combination of the library's features"
names=(defmt hal link serde store)
for ((set = 0; set < 32; set++)); do
    features=""
    for ((i = 0; i < 5; i++)); do (((set >> i) & 1)) && features+="${names[i]} "; done
    cargo check --quiet --locked --package evenbore --lib --no-default-features --features "$features"
done

stage "library without an operating system"
for target in "${BARE_TARGETS[@]}"; do
    for features in "${FEATURE_SETS[@]}"; do
        echo "$target, features: ${features:-none}"
        cargo build --quiet --locked --package evenbore --lib --target "$target" --no-default-features --features "$features"
    done
done

stage "tests, documentation examples and example programs; the emulated machines with them"
EVENBORE_BOARDS=1 cargo test --locked --workspace --no-fail-fast
cargo test --quiet --locked --package evenbore --features defmt,hal,link,serde,store
for example in examples/*.rs; do
    name="$(basename "$example" .rs)"
    echo "example $name"
    cargo run --quiet --locked --features link --example "$name" > /dev/null < /dev/null
done

stage "programs of boards: format, and the real ones built"
for board in emulated emulated/decoder "${REAL_BOARDS[@]}"; do
    (cd "boards/$board" && cargo fmt --check)
done
for board in "${REAL_BOARDS[@]}"; do
    (cd "boards/$board" && cargo build --quiet --release --locked)
done

stage "documentation"
cargo doc --quiet --locked --workspace --no-deps

stage "fluid tables against their formulations"
venv=target/fluid-tables-venv
[ -x "$venv/bin/python" ] || python3 -m venv "$venv" || die "cannot make a Python environment: install python3-venv"
"$venv/bin/pip" install --quiet --disable-pip-version-check -r boards/host/fluid-tables/requirements.txt \
    || die "cannot install the property library of boards/host/fluid-tables/requirements.txt"
"$venv/bin/python" boards/host/fluid-tables/generate.py --check

stage "the README's commands on the demo data"
out="$(mktemp -d)"
trap 'rm -rf "$out"' EXIT
grep -q 'examples/workshop/bench-nitrogen.csv' README.md || die "README no longer shows the demo calibration"
cargo run --quiet --locked --release -- calibrate examples/workshop/bench-nitrogen.csv \
    --element examples/workshop/element.toml --out "$out"
cargo run --quiet --locked --release -- flow examples/workshop/day-air-helium.csv \
    --record "$out/record.toml" --out "$out/flows.csv"

printf '\nall checks passed\n'
