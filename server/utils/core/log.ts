import pino from 'pino'

/** One line of JSON a record on stdout. Never log bodies, cookies or tokens. */
export const log = pino({ level: process.env.LOG_LEVEL ?? 'info', base: null, timestamp: pino.stdTimeFunctions.isoTime })
