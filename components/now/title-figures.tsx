'use client'

import { type Figure, Lambda, Time, TitleBlock } from '@/components/ui'
import type { Reading } from '@/lib/data/dto'
import { cx } from '@/lib/face/cx'
import { type FigureText, titleFigures } from '@/lib/face/figures'

const LABELS: Record<Exclude<FigureText['id'], `piece-${number}`>, React.ReactNode> = {
  reading: (
    <>
      reading <Lambda n={2} />
    </>
  ),
  usual: 'against usual',
  next: (
    <>
      next cut <Lambda n={3} />
    </>
  ),
  check: 'same-walker check',
  exact: (
    <>
      exact <Lambda n={2} />
    </>
  ),
  links: 'links measured',
  agents: 'agents heard',
  ends: 'loose ends',
}

export function TitleFigures({ reading }: { reading: Reading }) {
  const figures: Figure[] = titleFigures(reading).map((f) => ({
    id: f.id,
    label: f.label ?? LABELS[f.id as keyof typeof LABELS],
    value: f.value,
    remark:
      f.grave || f.strong ? (
        <span className={cx('font-semibold', f.grave ? 'text-vermilion' : 'text-ink')}>{f.remark}</span>
      ) : (
        f.remark
      ),
    main: f.id === 'reading',
  }))
  const [main, ...rest] = figures
  if (main) {
    const age = reading.lambda2 === null ? reading.last : reading
    main.remark = (
      <>
        {main.remark}
        {age ? (
          <>
            {reading.lambda2 === null ? ' at ' : ' · '}
            <Time at={age.at} show={reading.lambda2 === null ? 'both' : 'age'} />
          </>
        ) : null}
      </>
    )
    return <TitleBlock label="Figures of the reading" figures={[main, ...rest]} />
  }
  return null
}
