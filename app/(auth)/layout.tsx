import type { ReactNode } from 'react'

export default function AuthLayout({ children }: { children: ReactNode }) {
  return (
    <main id="main" tabIndex={-1} className="mx-auto max-w-xl px-4 py-12 outline-none sm:py-20">
      <p className="mb-8 font-head text-xl font-bold tracking-tight">Thinspan</p>
      {children}
    </main>
  )
}
