import { BaseSequencer, type TestSpecification } from 'vitest/node'

/** They take longest by far: begun last, one of them would go on alone at the end. */
const LONGEST = ['tests/e2e/namespaces.test.ts', 'tests/unit/method/simulate-traps.test.ts']

export class LongestFirst extends BaseSequencer {
  override async sort(files: TestSpecification[]): Promise<TestSpecification[]> {
    const sorted = await super.sort(files)
    const isLong = ({ moduleId }: TestSpecification) => LONGEST.some((path) => moduleId.endsWith(path))
    return [...sorted.filter(isLong), ...sorted.filter((file) => !isLong(file))]
  }
}
