/**
 * A small state machine that order, payment and refund share: a table of transitions, each with who may make it and named
 * guards. A guard returns the reason why not, in words for the person who asked.
 */
export interface Guard<Context> { name: string, refuse: (context: Context) => string | null }

export interface Transition<State extends string, Actor extends string, Context> {
  from: State
  to: State
  by: readonly Actor[]
  guards: readonly Guard<Context>[]
}

export interface Machine<State extends string, Actor extends string, Context> {
  /** How a person names a state. */
  words: Record<State, string>
  transitions: readonly Transition<State, Actor, Context>[]
}

/** Why the move is not allowed, or null when it is. */
export function refuseMove<State extends string, Actor extends string, Context>(
  machine: Machine<State, Actor, Context>, move: { from: State, to: State, actor: Actor, context: Context },
): string | null {
  const { from, to, actor, context } = move
  if (from === to) return `This is ${machine.words[to]} already.`
  const transition = machine.transitions.find(candidate => candidate.from === from && candidate.to === to)
  if (!transition) return describeMissing(machine, from, to)
  if (!transition.by.includes(actor)) return `A move from ${machine.words[from]} to ${machine.words[to]} is not yours to make.`
  for (const guard of transition.guards) {
    const reason = guard.refuse(context)
    if (reason) return reason
  }
  return null
}

/** States that this actor can move to now. */
export function allowedMoves<State extends string, Actor extends string, Context>(
  machine: Machine<State, Actor, Context>, now: { from: State, actor: Actor, context: Context },
): State[] {
  const targets = machine.transitions.filter(transition => transition.from === now.from).map(transition => transition.to)
  return targets.filter(to => refuseMove(machine, { ...now, to }) === null)
}

function describeMissing<State extends string, Actor extends string, Context>(machine: Machine<State, Actor, Context>, from: State, to: State): string {
  const before = machine.transitions.filter(transition => transition.to === to).map(transition => machine.words[transition.from])
  const next = machine.transitions.filter(transition => transition.from === from).map(transition => machine.words[transition.to])
  const needs = before.length ? ` ${capital(machine.words[to])} follows ${either(before)}.` : ''
  return `This is ${machine.words[from]}, so it cannot become ${machine.words[to]}.${needs}${next.length ? '' : ` Nothing follows ${machine.words[from]}.`}`
}

const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1)
const either = (names: string[]) => [...new Set(names)].join(' or ')
