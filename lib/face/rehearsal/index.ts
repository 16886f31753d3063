/** What the rehearsals page decides and says, without drawing any of it. */
export * from './change'
export {
  type ChooseFrom,
  type Chosen,
  choiceSentence,
  chosenOf,
  excludedInFull,
  excludedWords,
  isNothing,
  joinedOf,
  NOTHING,
  takableOf,
} from './choice'
export { type Compared, compared } from './compare'
export { askedOf, type Draft, whenOptions } from './draft'
export { initialDraft } from './initial'
export { type Pasted, readPasted } from './paste'
export { type Prefill, prefillOf, rehearsalPage, rehearsalsPage, rehearseHref } from './prefill'
export { AHEAD_MS, type SoonWindow, soonWindows } from './windows'
export {
  ANSWER_WORDS,
  awayWords,
  detailOf,
  headline,
  isOpen,
  lastLine,
  progressText,
  stateShape,
  stateWord,
} from './words'
