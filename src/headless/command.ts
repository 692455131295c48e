import { Fault, describe } from '../../worker/check.ts'
import { argumentFault, parseCall } from './arguments.ts'
import { count } from './count.ts'
import { date } from './date.ts'
import { oneLine } from './oneLine.ts'
import { prepare } from './prepare.ts'
import { profile } from './profile.ts'
import { calibrate } from './calibrate.ts'
import { compare } from './compare.ts'
import type { Verb } from './verb.ts'

/** The verbs, in the order of the job. */
const verbs: readonly Verb[] = [prepare, profile, count, compare, date, calibrate]

function help(): string {
  const width = Math.max(...verbs.map(({ name }) => name.length))
  const list = verbs.map(({ name, summary }) => `  ${name.padEnd(width)}  ${summary}`)
  return `npx winterclay VERB … [--out DIR] [--json]

Dates lake sediment by counting its annual layers (varves).

${list.join('\n')}

npx winterclay VERB --help says what a verb takes and writes.
Exit status: 0 done, 2 bad arguments or input (one line on standard error), 1 a mistake of the program.
`
}

/** Runs one command line (without node and script) and returns the exit status. */
export async function command(words: readonly string[]): Promise<0 | 1 | 2> {
  const name = words.at(0)
  try {
    if (name === undefined)
      argumentFault(
        'VERB',
        name,
        `which verb? One of ${verbs.map((v) => v.name).join(', ')}; see npx winterclay --help`,
      )
    if (name === '--help' || name === '-h') {
      process.stdout.write(help())
      return 0
    }
    const verb = verbs.find((one) => one.name === name)
    if (!verb) argumentFault('VERB', name, `there is no verb ${describe(name)}; see npx winterclay --help`)
    const call = parseCall(verb, words.slice(1))
    if (call.options.help === true) process.stdout.write(`${verb.help}\n`)
    else await verb.run(call)
    return 0
  } catch (error) {
    return report(name, error)
  }
}

/** One line on standard error: a Fault is the user's to mend (2), unless it is ours; anything else is ours (1). */
function report(verb: string | undefined, error: unknown): 1 | 2 {
  const ours = !(error instanceof Fault) || error.code === 'internal'
  const words = error instanceof Error ? error.message : String(error)
  const known = verbs.some(({ name }) => name === verb) ? ` ${verb}` : ''
  const line = `winterclay${known}: ${ours ? 'a mistake of the program: ' : ''}${words}`
  process.stderr.write(`${oneLine(line)}\n`)
  return ours ? 1 : 2
}
