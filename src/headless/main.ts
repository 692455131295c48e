#!/usr/bin/env node
import { command } from './command.ts'

// A reader that closes early (a pager, `head`) is no fault of the command.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error
})
process.exitCode = await command(process.argv.slice(2))
