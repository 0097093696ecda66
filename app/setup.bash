# What app/start and app/check share: finding what a build misses, installing it
# on Debian and Ubuntu, building. It is sourced, not run.

# What cgo, OpenGL, X11 and Wayland need at build time.
readonly build_packages=(gcc libc6-dev pkg-config libgl1-mesa-dev xorg-dev libwayland-dev libxkbcommon-dev)
# What the tests drive or compare with: a virtual display, a solid's hull, pictures, PDF.
readonly test_packages=(xvfb xdotool imagemagick qhull-bin poppler-utils)

say() { printf '%s\n' "$*"; }
warn() { printf '%s\n' "$*" >&2; }

# missing_packages NAME... prints those that dpkg does not have installed.
missing_packages() {
	local name
	for name in "$@"; do
		case "$(dpkg-query -W -f='${db:Status-Status}' "$name" 2>/dev/null)" in
		installed) ;;
		*) say "$name" ;;
		esac
	done
}

# agreed QUESTION asks unless --yes was given; no terminal and no --yes is a no.
agreed() {
	[[ $yes == true ]] && return 0
	[[ -t 0 ]] || { warn "Not asked, since nobody is at the keyboard: run with --yes to agree beforehand."; return 1; }
	local answer
	read -r -p "$1 [y/N] " answer
	[[ $answer == [yY]* ]]
}

# as_root COMMAND... runs it as root, and fails where there is no way to.
as_root() {
	if [[ $(id -u) -eq 0 ]]; then
		"$@"
	elif command -v sudo >/dev/null; then
		sudo "$@"
	else
		return 1
	fi
}

# install_missing NAME... installs what is missing of the named packages on Debian
# and Ubuntu; elsewhere it leaves the system alone. It fails if some stay missing.
install_missing() {
	command -v dpkg-query >/dev/null && command -v apt-get >/dev/null || return 0
	local -a missing
	mapfile -t missing < <(missing_packages "$@")
	[[ ${#missing[@]} -eq 0 ]] && return 0
	say "Missing on this system: ${missing[*]}"
	say "To install them: apt-get install ${missing[*]}"
	if [[ $(id -u) -ne 0 ]] && ! command -v sudo >/dev/null; then
		warn "That needs root, and there is no sudo here: run it as root first."
		return 1
	fi
	agreed "Install them now?" || return 1
	as_root env DEBIAN_FRONTEND=noninteractive apt-get -q update >&2 || warn "apt-get update failed; trying with what is known."
	as_root env DEBIAN_FRONTEND=noninteractive apt-get -q install -y --no-install-recommends "${missing[@]}" >&2
}

# other_systems prints what the window needs where there is no apt-get.
other_systems() {
	warn "The window needs a C compiler and the headers of OpenGL, X11 and Wayland:"
	warn "  Debian, Ubuntu  ${build_packages[*]}"
	warn "  Fedora          gcc pkgconf-pkg-config mesa-libGL-devel libX11-devel libXcursor-devel libXrandr-devel"
	warn "                  libXinerama-devel libXi-devel libXxf86vm-devel wayland-devel libxkbcommon-devel"
	warn "  Arch            gcc pkgconf libglvnd libx11 libxcursor libxrandr libxinerama libxi libxxf86vm wayland"
	warn "                  libxkbcommon"
	warn "  macOS           the command line tools: xcode-select --install"
}

# need_go fails in words unless a Go that can build this module is on the path.
need_go() {
	local wanted
	wanted=$(sed -n 's/^go //p' go.mod)
	if ! command -v go >/dev/null && [[ -x /usr/local/go/bin/go ]]; then
		PATH=$PATH:/usr/local/go/bin
	fi
	if ! command -v go >/dev/null; then
		warn "Go is not installed, or not on the PATH. Get Go $wanted or newer from https://go.dev/dl/,"
		warn "unpack it as described there, and run this again."
		return 1
	fi
	# Go 1.21 and newer fetch the toolchain that go.mod asks for; older ones cannot.
	local version
	if ! version=$(go version 2>&1) || ! go list -m >/dev/null 2>&1; then
		warn "This Go cannot build the module: ${version##*$'\n'}"
		warn "Get Go $wanted or newer from https://go.dev/dl/."
		return 1
	fi
}
