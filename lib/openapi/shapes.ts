import { z } from 'zod'
import { ANSWERS, type AnswerName } from './schemas'

export type JsonSchema = Readonly<Record<string, unknown>>

export const refTo = (name: AnswerName): JsonSchema => ({ $ref: `#/components/schemas/${name}` })

/** All answers, each in its place, referring to one another. */
export function answerShapes(): Record<string, JsonSchema> {
  const registry = z.registry<{ id: string }>()
  for (const [id, schema] of Object.entries(ANSWERS)) registry.add(schema, { id })
  const { schemas } = z.toJSONSchema(registry, {
    uri: (id) => `#/components/schemas/${id}`,
    unrepresentable: 'any',
  })
  return Object.fromEntries(Object.entries(schemas).map(([name, schema]) => [name, bare(schema)]))
}

/** Of what is sent: before defaults are filled in and text is turned into numbers. */
export const askedShape = (schema: z.ZodType): JsonSchema =>
  bare(z.toJSONSchema(schema, { io: 'input', unrepresentable: 'any' }))

export interface ParameterShape {
  name: string
  required: boolean
  schema: JsonSchema
}

const objectSchema = z.looseObject({
  properties: z.record(z.string(), z.record(z.string(), z.unknown())).default({}),
  required: z.array(z.string()).default([]),
})

/** The fields of a path's or a query's schema. What is text on the way in is told as what it is read as. */
export function parameterShapes(schema: z.ZodType): ParameterShape[] {
  const asked = objectSchema.parse(askedShape(schema))
  const read = objectSchema.parse(bare(z.toJSONSchema(schema, { unrepresentable: 'any' })))
  return Object.entries(asked.properties).map(([name, shape]) => ({
    name,
    required: asked.required.includes(name),
    schema: 'type' in shape || 'anyOf' in shape ? shape : { ...read.properties[name], ...shape },
  }))
}

/** A part of the document says neither where it lies nor which draft it follows: the document does. */
function bare(schema: object): JsonSchema {
  return Object.fromEntries(
    Object.entries(schema).filter(([key]) => key !== '$schema' && key !== '$id' && key !== '~standard'),
  )
}
