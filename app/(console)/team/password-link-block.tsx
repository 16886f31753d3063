import { CommandBlock, Outcome, Time } from '@/components/ui'

/** The one time the link can be seen. */
export function PasswordLinkBlock({
  name,
  url,
  expiresAt,
}: {
  name: string
  url: string
  expiresAt: string
}) {
  return (
    <div className="max-w-2xl space-y-3">
      <Outcome ok>
        Give this link to {name} yourself, by a way others do not read. It sets a password once, until{' '}
        <Time at={expiresAt} show="moment" />, and is not shown again.
      </Outcome>
      <CommandBlock label={`Link for ${name}`} text={url} />
    </div>
  )
}
