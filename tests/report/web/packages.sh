# Sourced with `here` set: node and the npm packages of package.json, or the test is skipped by name.
skip() {
    echo "skipped: $*"
    exit 77
}
command -v node >/dev/null 2>&1 || skip "no node"
whole() {
    for name in $(sed -n '/"dependencies"/,/}/s/^ *"\([^"]*\)": "[0-9].*/\1/p' "$here/package.json"); do
        [ -d "$here/node_modules/$name" ] || return 1
    done
}
if ! whole && [ "${SWARD_WEB_INSTALL:-0}" = 1 ]; then
    (cd "$here" && npm install --no-audit --no-fund --silent) || skip "npm could not install the packages"
fi
whole || skip "npm packages missing in tests/report/web/node_modules; SWARD_WEB_INSTALL=1 installs them"
