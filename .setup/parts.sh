# shellcheck shell=sh
# What `watch` and `test` both need: programs of the system, a Python, an environment of our own.
# Talk goes to standard error, so that standard output stays the product's.

top=${top:?the folder of the clone, set by the script that reads this file}

say() { printf 'diskwatch: %s\n' "$*" >&2; }
give_up() { say "$*"; exit 1; }
am_root() { [ "$(id -u)" -eq 0 ]; }

# --- programs of the system -------------------------------------------------------------------------------

policy=/usr/sbin/policy-rc.d
policy_kept=$policy.kept-by-diskwatch
policy_mark='# laid by the set-up of diskwatch for one installation; goes away by itself'

# Debian asks this file before it starts a service of a package that is being installed.
forbid_starts() {
    if [ -e "$policy" ] || [ -L "$policy" ]; then mv -f "$policy" "$policy_kept"; fi
    printf '#!/bin/sh\n%s\nexit 101\n' "$policy_mark" >"$policy"
    chmod 755 "$policy"
}

allow_starts() {
    if [ -f "$policy" ] && grep -qxF "$policy_mark" "$policy"; then rm -f "$policy"; fi
    if [ -e "$policy_kept" ] || [ -L "$policy_kept" ]; then mv -f "$policy_kept" "$policy"; fi
}

# Whatever the package would start at the next boot. Its owner may enable it again by hand.
disable_what_came_with() {
    dpkg -L "$1" | while read -r file; do
        name=${file##*/}
        case $file in
        /lib/systemd/system/*.service | /usr/lib/systemd/system/*.service | \
            /lib/systemd/system/*.timer | /usr/lib/systemd/system/*.timer | \
            /lib/systemd/system/*.socket | /usr/lib/systemd/system/*.socket)
            if command -v systemctl >/dev/null; then
                systemctl --quiet disable "$name" 2>/dev/null || say "$name could not be disabled; see: systemctl disable $name"
            else
                # Without systemd the packages lay its links all the same, for the day it comes.
                deb-systemd-helper disable "$name" >/dev/null 2>&1 || true
                find /etc/systemd/system -type l -lname "*/$name" -exec rm -f {} +
            fi
            ;;
        /etc/init.d/*) update-rc.d "$name" disable >/dev/null 2>&1 || true ;;
        esac
    done
}

installed() { dpkg-query -W -f='${db:Status-Status}' "$1" 2>/dev/null | grep -qx installed; }

# Silent where all goes well, else the last complaint in one line.
apt_get() {
    words=$(DEBIAN_FRONTEND=noninteractive apt-get -qq -o DPkg::Lock::Timeout=300 "$@" 2>&1) && return 0
    say "apt-get $1: $(printf '%s\n' "$words" | grep '^E: ' | tail -n 1)"
    return 1
}

# The lists of packages are fetched once, and only where something has to be installed.
lists_fetched=no
fetch_lists() {
    [ "$lists_fetched" = no ] || return 0
    say 'fetching the lists of packages'
    apt_get update || say 'the lists of packages could not be fetched; trying with those that are here'
    lists_fetched=yes
}

# want PROGRAM PACKAGE WHY: have the program, or say what is missing and go on.
want() {
    PATH=$PATH:/usr/sbin:/sbin command -v "$1" >/dev/null && return 0
    if ! command -v apt-get >/dev/null || ! command -v dpkg >/dev/null; then
        say "$1 is missing, so $3; install the package that holds it (on Debian: $2)"
    elif ! am_root; then
        say "$1 is missing, so $3; an administrator runs: apt-get update && apt-get install $2"
    else
        install_package "$2" || say "$2 could not be installed, so $3"
    fi
}

install_package() {
    # One that was here before is not ours to touch, and its services are its owner's choice.
    if installed "$1"; then return 1; fi
    fetch_lists
    say "installing $1"
    coming=$1
    exec 8</usr/sbin # something that every Debian has, to lock: two set-ups at once would mix their policies up
    if command -v flock >/dev/null; then flock -w 600 8 || say 'another set-up is still at work; going on'; fi
    allow_starts # what a run that was killed may have left behind
    trap 'settle' EXIT
    for signal in INT TERM HUP; do
        # shellcheck disable=SC2064 # the name of the signal is meant as it is now
        trap "settle; trap - $signal; kill -$signal \$\$" "$signal"
    done
    forbid_starts
    if apt_get install --yes --no-install-recommends "$coming"; then went=0; else went=1; fi
    settle
    return "$went"
}

# Also after an installation that was broken off: what is there must not start.
settle() {
    if installed "$coming"; then disable_what_came_with "$coming"; fi
    allow_starts
    trap - EXIT INT TERM HUP
    exec 8<&-
}

# --- a Python, and an environment of our own --------------------------------------------------------------

new_enough='import sys; sys.exit(sys.version_info < (3, 11))'
makes_environments='import ensurepip, venv'

# The first Python that is new enough and makes environments; else the first that is new enough.
find_python() {
    python=
    for candidate in python3 /usr/bin/python3 python3.14 python3.13 python3.12 python3.11; do
        "$candidate" -c "$new_enough" 2>/dev/null || continue
        [ -n "$python" ] || python=$candidate
        if "$candidate" -c "$makes_environments" 2>/dev/null; then
            python=$candidate
            return 0
        fi
    done
    [ -n "$python" ] || give_up "Python 3.11 or newer is needed, and $(python3 --version 2>/dev/null || echo 'no Python') is here"
    return 1
}

need_python() {
    find_python && return 0
    lacking="Python's venv module is missing, and nothing can be set up without it"
    command -v apt-get >/dev/null || give_up "$lacking; install it (on Debian: python3-venv)"
    am_root || give_up "$lacking; an administrator runs: apt-get update && apt-get install python3-venv"
    install_package python3-venv || give_up "$lacking; python3-venv could not be installed"
    find_python || give_up "$lacking; python3-venv is installed and does not help $python"
}

# Where the environment lies: in the clone, or in the user's cache where the clone is somebody else's.
choose_place() {
    venv=$top/.venv
    if [ -e "$venv" ]; then [ -w "$venv" ] && return 0; else [ -w "$top" ] && return 0; fi
    cache=${XDG_CACHE_HOME:-${HOME:+$HOME/.cache}}
    [ -n "$cache" ] || give_up "neither $top nor a home folder can be written, and an environment must lie somewhere"
    venv=$cache/diskwatch/venv-$(printf %s "$top" | sha256sum | cut -c1-12)
    mkdir -p "${venv%/*}" || give_up "$venv could not be made"
}

# What an environment was made for: it is made anew when any of this changes, say by an upgrade of Python.
state_now() {
    { cat "$top/pyproject.toml" && "$venv/bin/python" -VV && printf %s "$top"; } 2>/dev/null | sha256sum
}

# fill NAME ARGUMENTS...: have in the environment what pip installs by ARGUMENTS, once for each state of things.
fill() {
    name=$1
    shift
    mkdir -p "$venv" || give_up "$venv could not be made"
    # Two runs at once must not fill it together; a machine without flock takes the chance.
    exec 9>"$venv/lock"
    if command -v flock >/dev/null; then flock 9; fi
    state=$(state_now)
    if ! grep -qsxF "$state" "$venv"/*.stamp; then
        need_python
        say "making an environment in $venv"
        rm -rf "${venv:?}"/*.stamp "${venv:?}/bin" "${venv:?}/include" "${venv:?}/lib" "${venv:?}/lib64" \
            "${venv:?}/pyvenv.cfg"
        "$python" -m venv "$venv" >&2 || give_up "$python could not make an environment in $venv"
        # Debian 12's pip does not know --group yet.
        pip_install --upgrade pip
        state=$(state_now)
    fi
    if ! grep -qsxF "$state" "$venv/$name.stamp"; then
        say 'installing libraries into it (a minute or two, once)'
        pip_install "$@"
        printf '%s\n' "$state" >"$venv/$name.stamp"
    fi
    exec 9>&-
}

pip_install() {
    # By the environment, since pip starts others of its kind.
    PIP_RETRIES=2 PIP_DISABLE_PIP_VERSION_CHECK=1 "$venv/bin/python" -m pip install --quiet "$@" >"$venv/pip.log" 2>&1 ||
        give_up "pip could not install what is needed (is there a network?); its words are in $venv/pip.log"
}
