import type { Orientation } from '../../../worker/core/scan.ts'

/** Where the young end lies in the file's picture, in plain words. */
export const orientations: readonly { word: string; orientation: Orientation }[] = [
  { word: 'at the left', orientation: { axis: 'x', young: 'low' } },
  { word: 'at the right', orientation: { axis: 'x', young: 'high' } },
  { word: 'at the top', orientation: { axis: 'y', young: 'low' } },
  { word: 'at the bottom', orientation: { axis: 'y', young: 'high' } },
]

export function orientationWord({ axis, young }: Orientation): string {
  return orientations.find(({ orientation }) => orientation.axis === axis && orientation.young === young)?.word ?? ''
}

export function orientationOf(word: string): Orientation {
  return (orientations.find((one) => one.word === word) ?? orientations[0]).orientation
}
