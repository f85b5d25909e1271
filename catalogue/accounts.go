package catalogue

// hashesAtOnce bounds how many passwords are hashed at the same time.
const hashesAtOnce = 2
