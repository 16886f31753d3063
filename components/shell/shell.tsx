import { cookies } from 'next/headers'
import type { ReactNode } from 'react'
import type { UserCaller } from '@/lib/auth/caller'
import { roleReaches } from '@/lib/auth/permissions'
import { parseSheetChoice, SHEET_COOKIE } from '@/lib/face/sheet-choice'
import { MarginIndex } from './margin-index'
import { SheetSwitch } from './sheet-switch'

export interface ShellProps {
  /** Who is signed in; null on the way to the sign-in page. */
  user: Pick<UserCaller, 'name' | 'teams'> | null
  /** The form that signs out. */
  signOut: ReactNode
  children: ReactNode
}

export async function Shell({ user, signOut, children }: ShellProps) {
  const choice = parseSheetChoice((await cookies()).get(SHEET_COOKIE)?.value)
  return (
    <div className="md:flex md:items-start">
      <MarginIndex
        mayAudit={user?.teams.some((t) => roleReaches(t.role, 'operator')) ?? false}
        foot={
          <div className="space-y-4">
            {user ? (
              <div className="text-sm">
                <p className="text-soft">Signed in as</p>
                <p className="break-words">{user.name}</p>
                {signOut}
              </div>
            ) : null}
            <SheetSwitch initial={choice} />
          </div>
        }
      />
      <main
        id="main"
        tabIndex={-1}
        className="min-w-0 flex-1 px-3 pt-6 pb-16 outline-none sm:px-6 md:pt-8 lg:px-11"
      >
        <div className="mx-auto max-w-[78rem]">{children}</div>
      </main>
    </div>
  )
}
