/** Names the rules by which a reading was made; raise it when the same recording would give another reading. */
export const ANALYSIS_VERSION = '1.1.0'
