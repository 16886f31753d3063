import { EmptyState, LinkButton, PageHeading } from '@/components/ui'

export default function ConsoleNotFound() {
  return (
    <>
      <PageHeading title="Nothing at this address" />
      <EmptyState
        title="The page does not exist, or it belongs to a team you are not in."
        actions={<LinkButton href="/overlays">Go to the overlays</LinkButton>}
      >
        Check the address. If a colleague sent it, ask them to add you to their team.
      </EmptyState>
    </>
  )
}
