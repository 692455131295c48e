/** One turn of the event loop, so that messages get in; without the 4 ms that browsers add to nested timers. */
export function takeTurn(): Promise<void> {
  return new Promise((resolve) => {
    const { port1, port2 } = new MessageChannel()
    port1.onmessage = () => {
      port1.close()
      resolve()
    }
    port2.postMessage(null)
  })
}

/** A call that gives the event loop a turn when at least 20 ms have passed since the last one. */
export function pacer(): () => Promise<void> {
  let last = performance.now()
  return async () => {
    if (performance.now() - last < 20) return
    await takeTurn()
    last = performance.now()
  }
}
