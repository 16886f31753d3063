import type { Floor, RuleSettings } from './rule'

/** What a rule looks for, in words: "at most 2 links between the sides". */
export function ruleWords(settings: RuleSettings): string {
  switch (settings.kind) {
    case 'floor':
      return `reading under ${floorWords(settings.floor)}`
    case 'few-links':
      return `at most ${settings.links} ${settings.links === 1 ? 'link' : 'links'} between the sides`
    case 'falling':
      return `falling, ${floorWords(settings.floor)} in sight within ${settings.withinHours} h`
    case 'split':
      return 'split, or to be treated as split'
    case 'unheard':
      return `${settings.agents} ${settings.agents === 1 ? 'agent' : 'agents'} or more unheard`
    case 'coverage':
      return `coverage under ${settings.percent} %`
    case 'audit':
      return 'figures that contradict one another'
  }
}

function floorWords(floor: Floor): string {
  return floor.of === 'usual' ? `${floor.percent} % of its usual` : String(floor.lambda2)
}
