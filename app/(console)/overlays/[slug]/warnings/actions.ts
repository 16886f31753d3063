'use server'

import { z } from 'zod'
import { changeRule, createRule, createWindow, endWindow, removeRule } from '@/lib/data'
import { newWindowSchema, ruleChangeSchema } from '@/lib/data/rules-dto'
import { action } from '@/lib/http'
import { jsonField } from '@/lib/http/json-field'
import { ruleSchema } from '@/lib/warn/rule'
import { windowFieldsSchema } from './window-fields'

export const addRuleAction = action(
  'rule.change',
  z.object({ slug: z.string(), rule: jsonField.pipe(ruleSchema) }),
  (call, { slug, rule }) => createRule(call, slug, rule),
)

export const changeRuleAction = action(
  'rule.change',
  z.object({ slug: z.string(), id: z.string(), rule: jsonField.pipe(ruleChangeSchema) }),
  (call, { slug, id, rule }) => changeRule(call, slug, id, rule),
)

export const removeRuleAction = action(
  'rule.change',
  z.object({ slug: z.string(), id: z.string() }),
  (call, { slug, id }) => removeRule(call, slug, id),
)

export const createWindowAction = action(
  'window.change',
  windowFieldsSchema.pipe(z.object({ slug: z.string(), window: newWindowSchema })),
  (call, { slug, window }) => createWindow(call, slug, window),
)

export const endWindowAction = action(
  'window.change',
  z.object({ slug: z.string(), id: z.string() }),
  (call, { slug, id }) => endWindow(call, slug, id),
)
