import type { z } from 'zod'
import { plainErrors } from '#shared/schemas/plainErrors'
import { type GenericObject, type TypedSchema, useForm } from 'vee-validate'

/** vee-validate's own adapter knows zod 3 only; this is the same thing for zod 4. */
function toTypedSchema<Input extends GenericObject, Output extends GenericObject>(schema: z.ZodType<Output, Input>): TypedSchema<Input, Output> {
  return {
    __type: 'VVTypedSchema',
    async parse(values) {
      const result = await schema.safeParseAsync(values, { error: plainErrors })
      if (result.success) return { value: result.data, errors: [] }
      const byPath = new Map<string, string[]>()
      for (const issue of result.error.issues) {
        const path = issue.path.map((part, index) => typeof part === 'number' ? `[${part}]` : index ? `.${String(part)}` : String(part)).join('')
        byPath.set(path, [...byPath.get(path) ?? [], issue.message])
      }
      return { errors: [...byPath].map(([path, errors]) => ({ path, errors })) }
    },
  }
}

/**
 * A form on the schema that the route itself uses. `submit(action)` validates, runs, and puts what the server says of a
 * field beside that field; what was typed stays.
 */
export function useZodForm<Input extends GenericObject, Output extends GenericObject>(schema: z.ZodType<Output, Input>, initialValues: Partial<Input>) {
  const form = useForm<Input, Output>({ validationSchema: toTypedSchema(schema), initialValues: initialValues as never })
  const problem = ref<ApiProblem | null>(null)
  const submit = (action: (values: Output) => Promise<void>) => form.handleSubmit(async (values) => {
    problem.value = null
    try {
      await action(values as Output)
    } catch (error) {
      problem.value = describeProblem(error)
      form.setErrors(problem.value.issues as never)
    }
  })
  return { ...form, problem, submit }
}
