import { EmptyState, LinkButton } from '@/components/ui'

export default function NotFound() {
  return (
    <main id="main" className="mx-auto max-w-2xl px-4 py-16">
      <h1 className="mb-6 text-3xl">Nothing at this address</h1>
      <EmptyState
        title="The page does not exist, or it belongs to a team you are not in."
        actions={<LinkButton href="/overlays">Go to the overlays</LinkButton>}
      >
        Check the address. If a colleague sent it, ask them to add you to their team.
      </EmptyState>
    </main>
  )
}
