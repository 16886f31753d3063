import { CommandBlock } from '@/components/ui'
import { exampleCommands, type JoiningInput } from '@/lib/face/joining'
import type { JoiningExample } from './types'
import { CommandBlocks, Lead, Typed } from './way'

export function Embedding({ example, input }: { example: JoiningExample; input: JoiningInput }) {
  return (
    <>
      <Lead>
        A sidecar measures the path beside the overlay’s own connections. A program that hands its connections
        to the agent has the connections themselves measured: it implements two functions,{' '}
        <Typed>listen</Typed> and <Typed>dial</Typed>, over what it has. This is that part of{' '}
        <Typed>{example.folder}</Typed>, a small overlay over TCP that the tests compile and run; start from
        it, in a copy of Thinspan’s folder. What a transport has to keep to stands in{' '}
        <Typed>agent/transport/transport.ts</Typed>.
      </Lead>
      {example.parts.map(({ path, text }) => (
        <CommandBlock key={path} label={path} text={text} />
      ))}
      <CommandBlocks commands={exampleCommands(input, example.main)} />
    </>
  )
}
