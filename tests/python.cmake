# The interpreter whose packages Debian installs (python3-jsonschema and the like); another one first on the path may
# lack them.
find_program(STANCHION_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
find_program(STANCHION_PYTHON NAMES python3 REQUIRED)
